package cli

import (
	"fmt"
	"io"
	"sync"
	"time"

	"ligancy/cmd/ligancy/internal/report"
)

const (
	quietFor   = time.Second            // shorter work shows nothing
	redrawEach = 200 * time.Millisecond // at most
)

// progress shows on a terminal how work gets on and how long it will still
// take, on one line that is wiped at the end. Its methods may be called from
// any goroutine.
type progress struct {
	w   io.Writer
	now func() time.Time

	mu       sync.Mutex
	began    time.Time // all work
	entered  time.Time // the present run of steps
	done, of int       // where that run stands
	drawn    time.Time
	stands   bool // a line is on the screen
}

// newProgress returns a recorder; on anything but a terminal it is silent.
func (p *program) newProgress() *progress {
	r := &progress{w: io.Discard, now: p.Now, began: p.Now()}
	if p.StderrTerminal && p.Getenv("TERM") != "dumb" {
		r.w = p.Stderr
	}
	return r
}

// Progress of one stage, done of total steps. Stages that count on towards the
// same total are one run of steps: its pace tells the time left.
func (r *progress) Progress(stage string, done, of int) {
	r.mu.Lock()
	defer r.mu.Unlock()
	now := r.now()
	if r.entered.IsZero() || of != r.of || done < r.done {
		r.entered = now
	}
	r.done, r.of = done, of
	if now.Sub(r.began) < quietFor || now.Sub(r.drawn) < redrawEach {
		return
	}
	r.drawn, r.stands = now, true
	line := report.Short(stage, 50)
	if of > 0 {
		line += fmt.Sprintf(", %d of %d done", done, of)
	}
	if left := timeLeft(now.Sub(r.entered), done, of); left > 0 {
		line += ", " + duration(left) + " left"
	}
	fmt.Fprint(r.w, eraseLine, line)
}

// eraseLine goes to the beginning of the line and clears it.
const eraseLine = "\r\x1b[K"

// wipe removes the line.
func (r *progress) wipe() {
	r.mu.Lock()
	defer r.mu.Unlock()
	if r.stands {
		fmt.Fprint(r.w, eraseLine)
		r.stands = false
	}
}

// timeLeft extrapolates; 0 where nothing can be said.
func timeLeft(spent time.Duration, done, of int) time.Duration {
	if done <= 0 || of <= done {
		return 0
	}
	return time.Duration(float64(spent) / float64(done) * float64(of-done))
}

// duration in words that do not pretend: whole seconds, then minutes.
func duration(d time.Duration) string {
	switch s := int(d.Round(time.Second) / time.Second); {
	case s <= 1:
		return "1 s"
	case s < 120:
		return fmt.Sprintf("%d s", s)
	default:
		return fmt.Sprintf("%d min", (s+30)/60)
	}
}
