// Package modelfile writes a superheat model to a JSON file and reads it back,
// complete with the fluid records behind it, so that the file predicts on its own.
//
// New gathers a model into a File; File.Encode writes it; Decode reads and checks
// it; File.Model is the model again. A model that was written and read predicts the
// same numbers to the last bit. There are no time stamps: the same model gives the
// same bytes.
//
// The shape of the file is the JSON Schema of package data/schema. Beyond the shape
// Decode checks the meaning: parameters that the variant has, groups that the
// records and the validity know, a covariance that is positive semidefinite and
// agrees with the standard uncertainties. Each offending place is named by its JSON
// pointer.
//
// Units are SI, except where a key names another one; parameters carry the unit of
// package fit: K for offset and spread, nm for the Tolman length, else 1.
//
// The package does not open files and does not judge whether a model is good.
package modelfile
