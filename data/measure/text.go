package measure

import (
	"bytes"
	"fmt"
	"hash"
	"io"
	"unicode/utf8"
)

// textReader passes UTF-8 text through, takes off a byte order mark and feeds the raw bytes to a hash.
// It stops with a *textError at the first byte that is no text.
type textReader struct {
	source io.Reader
	sum    hash.Hash
	buf    [1 << 16]byte
	ready  []byte // checked bytes not yet handed out
	carry  []byte // the start of a character whose rest is still to come
	err    error  // what follows ready
	begun  bool
	offset int64 // bytes of the file before ready and carry
	line   int   // lines complete before that
	start  int64 // offset at which the current line begins

	record  int64 // offset at which the record that is being read begins
	longest int64 // bytes that a record may have
}

// textError is a byte that cannot belong to a CSV file in UTF-8.
type textError struct {
	line, column    int
	found, expected string
	cause           error
}

func (e *textError) Error() string { return e.found }

// Unwrap returns the cause.
func (e *textError) Unwrap() error { return e.cause }

// Read implements io.Reader.
func (t *textReader) Read(p []byte) (int, error) {
	for len(t.ready) == 0 {
		if t.err != nil {
			return 0, t.err
		}
		t.fill()
	}
	n := copy(p, t.ready)
	t.ready = t.ready[n:]
	return n, nil
}

// fill reads and checks the next part of the source.
func (t *textReader) fill() {
	held := copy(t.buf[:], t.carry)
	n, err := t.source.Read(t.buf[held:])
	t.sum.Write(t.buf[held : held+n])
	data := t.buf[:held+n]
	t.carry = nil
	if !t.begun {
		if len(data) < 3 && err == nil {
			t.carry = data
			return
		}
		t.begun = true
		if bytes.HasPrefix(data, []byte("\xff\xfe")) || bytes.HasPrefix(data, []byte("\xfe\xff")) {
			t.err = &textError{1, 1, "file begins with the byte order mark of UTF-16", "UTF-8 (save as \"CSV UTF-8\")", nil}
			return
		}
		if bytes.HasPrefix(data, []byte("\xef\xbb\xbf")) {
			data = data[3:]
			t.offset, t.start = 3, 3
		}
	}
	good, stop := t.check(data, err != nil)
	t.ready = data[:good]
	t.line += bytes.Count(t.ready, []byte{'\n'})
	if i := bytes.LastIndexByte(t.ready, '\n'); i >= 0 {
		t.start = t.offset + int64(i) + 1
	}
	t.offset += int64(good)
	switch {
	case stop != "":
		t.err = &textError{t.line + 1, int(t.offset-t.start) + 1, fmt.Sprintf("%s at byte %d of the file", stop, t.offset+1), t.hint(data[good]), nil}
	case err != nil:
		t.err = err
	case t.offset-t.record > t.longest:
		e := &LimitError{What: "record", Limit: t.longest, Unit: "bytes"}
		t.err = &textError{t.line + 1, int(t.offset-t.start) + 1, e.Error(), "at most that (is a quotation mark not closed, or the end of a line missing?)", e}
	default:
		t.carry = data[good:]
	}
}

// check returns how many bytes of data are text; stop names the byte after them if it is wrong.
func (t *textReader) check(data []byte, last bool) (good int, stop string) {
	if utf8.Valid(data) && bytes.IndexByte(data, 0) < 0 {
		return len(data), ""
	}
	for i := 0; i < len(data); {
		r, size := utf8.DecodeRune(data[i:])
		switch {
		case r == 0:
			return i, "NUL byte"
		case r == utf8.RuneError && size == 1 && (last || utf8.FullRune(data[i:])):
			return i, fmt.Sprintf("byte 0x%02X is not UTF-8", data[i])
		case r == utf8.RuneError && size == 1:
			return i, ""
		}
		i += size
	}
	return len(data), ""
}

func (t *textReader) hint(b byte) string {
	if b == 0 {
		return "text (is the file in UTF-16, or a workbook?)"
	}
	return "UTF-8 (is the file in Latin-1 or Windows-1252? save as \"CSV UTF-8\")"
}
