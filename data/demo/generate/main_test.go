package main

import (
	"bytes"
	"os"
	"testing"
)

// TestCommitted: the file beside this program is what the program writes.
func TestCommitted(t *testing.T) {
	want, err := os.ReadFile("../droplets.csv")
	if err != nil {
		t.Fatal(err)
	}
	var got bytes.Buffer
	if err := generate(&got); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got.Bytes(), want) {
		t.Error("droplets.csv is not what this program writes; run go run ./data/demo/generate -out data/demo/droplets.csv")
	}
}
