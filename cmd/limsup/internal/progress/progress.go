// Package progress shows on a terminal how far a long piece of work is and how long it will still take.
//
// Nothing is drawn during the first second, so that short work leaves no trace, and the line is erased at the
// end: what a command prints is the same with and without it. The work itself only calls Bar.Set, a function
// of two whole numbers, so that the packages that compute need not know this one. A nil Bar does nothing.
//
// It will not decide whether the writer is a terminal and whether the user wants to see it: the caller does.
package progress

import (
	"fmt"
	"io"
	"sync"
	"time"

	"github.com/schollz/progressbar/v3"
)

const (
	silence = time.Second            // work shorter than this is not reported
	refresh = 200 * time.Millisecond // between two drawings
	width   = 24                     // columns of the bar itself
	dial    = 9                      // spinner made of ASCII strokes
)

// Bar is one line of progress. The zero value is not used; see Start.
type Bar struct {
	writer  io.Writer
	what    string
	started time.Time
	stop    chan struct{}
	ended   chan struct{}
	once    sync.Once

	mutex       sync.Mutex
	done, total int

	drawn      *progressbar.ProgressBar // owned by the drawing goroutine
	drawnTotal int
}

// Start begins to report work called what, as in "comparing variants", on w. If on is false it returns nil,
// whose methods do nothing.
func Start(w io.Writer, what string, on bool) *Bar {
	if !on {
		return nil
	}
	b := &Bar{writer: w, what: what, started: time.Now(), stop: make(chan struct{}), ended: make(chan struct{})}
	go b.run()
	return b
}

// Set tells that done of total equal parts are finished. It may be called from any goroutine; it draws nothing
// itself and returns at once. Before the first call the amount of work counts as unknown.
func (b *Bar) Set(done, total int) {
	if b == nil {
		return
	}
	b.mutex.Lock()
	defer b.mutex.Unlock()
	b.done, b.total = done, total
}

// Stop erases the line. Nothing is drawn afterwards. Further calls do nothing.
func (b *Bar) Stop() {
	if b == nil {
		return
	}
	b.once.Do(func() {
		close(b.stop)
		<-b.ended
	})
}

// run draws until it is stopped.
func (b *Bar) run() {
	defer close(b.ended)
	wait := time.NewTimer(silence)
	defer wait.Stop()
	for {
		select {
		case <-b.stop:
			if b.drawn != nil {
				_ = b.drawn.Clear() // a line that cannot be erased is no reason to fail
			}
			return
		case <-wait.C:
			b.draw()
			wait.Reset(refresh)
		}
	}
}

// draw shows the present state.
func (b *Bar) draw() {
	b.mutex.Lock()
	done, total := b.done, b.total
	b.mutex.Unlock()
	elapsed := time.Since(b.started)
	text := fmt.Sprintf("%s, %s", b.what, span(elapsed))
	if done < 1 || total < 1 {
		total = -1 // a dial: nothing is known of the rest
	} else {
		text += ", " + remaining(elapsed, done, total)
	}
	if b.drawn == nil || total != b.drawnTotal {
		if b.drawn != nil {
			_ = b.drawn.Clear()
		}
		b.drawn, b.drawnTotal = line(b.writer, total), total
	}
	if total > 0 {
		_ = b.drawn.Set(min(done, total-1)) // at its end the library would stop drawing; the line ends with Stop
	}
	b.drawn.Describe(text)
}

// line is a bar of total parts, or a dial for total -1, that draws only when its description is set.
func line(w io.Writer, total int) *progressbar.ProgressBar {
	return progressbar.NewOptions(total, progressbar.OptionSetWriter(w), progressbar.OptionSetWidth(width),
		progressbar.OptionSetTheme(progressbar.ThemeASCII), progressbar.OptionSetPredictTime(false), progressbar.OptionSetElapsedTime(false),
		progressbar.OptionSpinnerType(dial), progressbar.OptionSetSpinnerChangeInterval(0), progressbar.OptionSetVisibility(true))
}

// remaining estimates the time left from the mean time of the parts done so far.
func remaining(elapsed time.Duration, done, total int) string {
	if done >= total {
		return "nearly done"
	}
	left := float64(elapsed) / float64(done) * float64(total-done)
	const century = 100 * 365 * 24 * time.Hour // stands for anything longer, which a Duration may not hold
	return "about " + span(time.Duration(min(left, float64(century)))) + " left"
}

// span writes a duration for a person: "40 s", "3 min 20 s", "2 h 5 min".
func span(d time.Duration) string {
	s := int64((d + time.Second/2) / time.Second)
	switch {
	case s < 60:
		return fmt.Sprintf("%d s", s)
	case s < 3600:
		return fmt.Sprintf("%d min %d s", s/60, s%60)
	}
	return fmt.Sprintf("%d h %d min", s/3600, s%3600/60)
}
