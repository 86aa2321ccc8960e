package progress

import (
	"bytes"
	"math"
	"regexp"
	"strings"
	"sync"
	"testing"
	"testing/synctest"
	"time"
)

// sink is a buffer that two goroutines may use.
type sink struct {
	mutex  sync.Mutex
	buffer bytes.Buffer
}

func (s *sink) Write(p []byte) (int, error) {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	return s.buffer.Write(p)
}

func (s *sink) String() string {
	s.mutex.Lock()
	defer s.mutex.Unlock()
	return s.buffer.String()
}

// screen is what a terminal line has shown: the text after the last carriage return, without the blanks that erase.
func screen(b *sink) string {
	parts := strings.Split(b.String(), "\r")
	return strings.TrimRight(parts[len(parts)-1], " ")
}

// Time is that of the test bubble: it moves only where the test sleeps.
func TestBarAppearsAfterASecondAndLeavesNothing(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var out sink
		b := Start(&out, "comparing", true)
		b.Set(1, 8)
		time.Sleep(silence - time.Millisecond)
		synctest.Wait()
		if out.String() != "" {
			t.Fatalf("drawn within the first second: %q", out.String())
		}
		b.Set(2, 8)
		time.Sleep(2 * time.Millisecond)
		synctest.Wait()
		// A quarter done in one second leaves three.
		if got, want := screen(&out), "comparing, 1 s, about 3 s left"; !strings.HasPrefix(got, want) || !strings.Contains(got, "25%") {
			t.Errorf("drawn %q, want %q and 25%%", got, want)
		}
		b.Set(8, 8)
		time.Sleep(time.Second)
		synctest.Wait()
		if got := screen(&out); !strings.HasPrefix(got, "comparing, 2 s, nearly done") {
			t.Errorf("at the end: %q", got)
		}
		b.Stop()
		if got := screen(&out); got != "" {
			t.Errorf("left on the line: %q", got)
		}
		n := len(out.String())
		b.Set(1, 2)
		b.Stop()
		time.Sleep(time.Minute)
		if len(out.String()) != n {
			t.Errorf("drawn after Stop: %q", out.String()[n:])
		}
	})
}

func TestDialBeforeTheAmountIsKnown(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var out sink
		b := Start(&out, "tuning", true)
		seen := map[string]bool{}
		for range 5 {
			time.Sleep(time.Second)
			synctest.Wait()
			got := screen(&out)
			if !regexp.MustCompile(`^[|/\\-] tuning, \d s$`).MatchString(got) {
				t.Fatalf("drawn %q", got)
			}
			seen[got] = true
		}
		if len(seen) != 5 {
			t.Errorf("the dial stands still: %v", seen)
		}
		b.Set(1, 3)
		time.Sleep(time.Second)
		synctest.Wait()
		if got := screen(&out); !strings.HasPrefix(got, "tuning, 6 s, about 12 s left") {
			t.Errorf("drawn %q", got)
		}
		b.Stop()
	})
}

// A shorter text must not leave the tail of a longer one behind.
func TestEveryDrawingErasesTheOneBefore(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var out sink
		b := Start(&out, "tuning", true)
		for i := range 50 {
			b.Set(i, 50)
			time.Sleep(7 * time.Second)
		}
		b.Set(0, 0) // back to the dial, which is shorter
		time.Sleep(time.Second)
		b.Stop()
		line, drawings := "", 0
		for _, part := range strings.Split(out.String(), "\r") {
			if len(part) < len(line) {
				line = part + line[len(part):] // what a terminal shows after the carriage return
			} else {
				line = part
			}
			if text := strings.TrimRight(part, " "); text != "" {
				drawings++
				if strings.TrimRight(line, " ") != text {
					t.Fatalf("the line shows %q after drawing %q", line, text)
				}
			}
		}
		if drawings < 50 || strings.TrimSpace(line) != "" {
			t.Errorf("%d drawings; the line shows %q at the end", drawings, line)
		}
	})
}

func TestOffDoesNothing(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		var out sink
		b := Start(&out, "tuning", false)
		b.Set(1, 2)
		time.Sleep(time.Minute)
		b.Stop()
		if b != nil || out.String() != "" {
			t.Errorf("bar %v drew %q", b, out.String())
		}
	})
}

func TestSpan(t *testing.T) {
	for _, tt := range []struct {
		d    time.Duration
		want string
	}{
		{0, "0 s"}, {499 * time.Millisecond, "0 s"}, {500 * time.Millisecond, "1 s"}, {59499 * time.Millisecond, "59 s"}, {59500 * time.Millisecond, "1 min 0 s"},
		{200 * time.Second, "3 min 20 s"}, {3599 * time.Second, "59 min 59 s"}, {7500 * time.Second, "2 h 5 min"},
	} {
		if got := span(tt.d); got != tt.want {
			t.Errorf("span(%v) = %q, want %q", tt.d, got, tt.want)
		}
	}
}

// The estimate must survive the smallest and the largest counts.
func TestRemainingOfExtremes(t *testing.T) {
	if got := remaining(time.Second, 1, math.MaxInt); !strings.HasPrefix(got, "about ") || strings.Contains(got, "-") {
		t.Errorf("remaining %q", got)
	}
	if got := remaining(0, 1, 2); got != "about 0 s left" {
		t.Errorf("remaining %q", got)
	}
}
