// Package share divides a computation of many independent jobs into shares, writes
// the results of a share as a part, and joins parts.
//
// A part is JSON: what was computed (kind, plan, seed, limsup version), from which
// inputs (SHA-256 of each file), which share of how many, and one result for each of
// its jobs, in the order of the jobs. The first part also carries the bytes of the
// inputs, so that whoever joins the parts needs nothing else. There are no time
// stamps and no names of machines: the same share gives the same bytes wherever and
// whenever it is computed.
//
// The package knows nothing of what the results mean, starts no job and reads no
// file of its own accord.
package share

import (
	"fmt"
	"strconv"
	"strings"
)

// Share is number K of N shares, 1 ≤ K ≤ N.
type Share struct {
	K int `json:"share"`
	N int `json:"of"`
}

// Most is the largest number of shares.
const Most = 1_000_000

// Parse reads "K/N".
//
// Errors: *ShareError.
func Parse(text string) (Share, error) {
	k, n, ok := strings.Cut(text, "/")
	s := Share{}
	var err error
	if s.K, err = strconv.Atoi(strings.TrimSpace(k)); err != nil || !ok {
		return Share{}, &ShareError{text}
	}
	if s.N, err = strconv.Atoi(strings.TrimSpace(n)); err != nil || !s.valid() {
		return Share{}, &ShareError{text}
	}
	return s, nil
}

func (s Share) valid() bool { return 1 <= s.K && s.K <= s.N && s.N <= Most }

// String returns "K/N".
func (s Share) String() string { return fmt.Sprintf("%d/%d", s.K, s.N) }

// Range gives the jobs of the share, from first up to but not including last, of jobs
// numbered from 0. The shares cover all jobs without overlap, and their sizes differ
// by one at most. Neighbouring jobs stay together; where there are more shares than jobs,
// some are empty.
func (s Share) Range(jobs int) (first, last int) {
	n := int64(jobs)
	return int(n * int64(s.K-1) / int64(s.N)), int(n * int64(s.K) / int64(s.N))
}
