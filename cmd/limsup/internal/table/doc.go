// Package table holds one model of a results table and renders it four ways: for the screen, as CSV, as JSON
// and as Markdown. It also sets the short blocks around a table: aligned facts and wrapped paragraphs.
//
// Symbols and units. A column carries its quantity (Name, a key such as "temperature"; Title, a symbol or words for
// readers) and its unit as a UCUM code ("K", "m3/mol", "m-3.s-1"). Headers follow quantity calculus: the cells below
// "temperature/K" are temperature divided by kelvin, hence pure numbers. Units "" and "1" add nothing.
//
// Precision. The screen rounds a column as a whole, so that its decimal signs stand below each other. CSV, JSON
// and Markdown carry the shortest decimal that reads back as the same float64.
//
// Text. Control characters, bidirectional controls, private-use and unassigned characters and broken UTF-8 are
// written as visible escapes (`\x1b`, `\u202e`); nothing a file contains can steer a terminal. In CSV a text cell that
// starts with = + - @, tab, CR or LF gets an apostrophe in front, because spreadsheets would run it as a formula;
// numbers are never touched. Display widths are counted per grapheme cluster, ambiguous characters as narrow.
//
// What it will not do: convert units, print a NaN or an infinity (see [BadCellError]), shorten a number, leave out a
// column without saying so, or decide whether colour is wanted (see [ColourAllowed]).
package table
