package cli

import (
	"bytes"
	"strings"
	"testing"
	"time"
)

// clock is set by hand.
type clock struct{ t time.Time }

func (c *clock) now() time.Time       { return c.t }
func (c *clock) pass(d time.Duration) { c.t = c.t.Add(d) }

func watched(terminal bool, term string) (*progress, *clock, *bytes.Buffer) {
	c, b := &clock{time.Unix(0, 0)}, &bytes.Buffer{}
	p := &program{Env: Env{Stderr: b, StderrTerminal: terminal, Now: c.now, Getenv: func(name string) string {
		if name == "TERM" {
			return term
		}
		return ""
	}}}
	return p.newProgress(), c, b
}

func TestProgressTellsTheTimeLeftAfterASecond(t *testing.T) {
	p, c, b := watched(true, "xterm")
	p.Progress("fitting stepwise", 0, 7)
	c.pass(600 * time.Millisecond)
	p.Progress("fitting ring", 1, 7)
	if b.Len() > 0 {
		t.Errorf("shown within the first second: %q", b)
	}
	c.pass(1400 * time.Millisecond)
	p.Progress("fitting \x1b[2Jpair", 2, 7)
	const want = "\r\x1b[K" + `fitting \x1b[2Jpair, 2 of 7 done, 5 s left`
	if b.String() != want {
		t.Errorf("%q, want %q", b, want)
	}
	c.pass(10 * time.Millisecond)
	p.Progress("fitting pair", 3, 7)
	if b.String() != want {
		t.Errorf("redrawn after 10 ms: %q", b)
	}
	p.wipe()
	if !strings.HasSuffix(b.String(), "\r\x1b[K") {
		t.Errorf("not wiped: %q", b)
	}
}

func TestProgressStartsItsPaceAnewWithEachRunOfSteps(t *testing.T) {
	p, c, b := watched(true, "xterm")
	p.Progress("fitting", 0, 2)
	c.pass(100 * time.Second)
	p.Progress("simulating", 0, 199)
	c.pass(time.Second)
	p.Progress("simulating", 1, 199)
	if !strings.HasSuffix(b.String(), "simulating, 1 of 199 done, 3 min left") {
		t.Errorf("%q", b)
	}
}

func TestProgressIsSilentWhereNobodyWatches(t *testing.T) {
	for _, c := range []struct {
		terminal bool
		term     string
	}{{false, "xterm"}, {true, "dumb"}} {
		p, clock, b := watched(c.terminal, c.term)
		clock.pass(time.Minute)
		p.Progress("fitting", 1, 2)
		p.wipe()
		if b.Len() > 0 {
			t.Errorf("%+v: %q", c, b)
		}
	}
}

func TestColourOnlyOnATerminalAndNeverWithNoColor(t *testing.T) {
	for _, c := range []struct {
		terminal      bool
		noColor, term string
		want          bool
	}{
		{true, "", "xterm", true}, {false, "", "xterm", false}, {true, "1", "xterm", false}, {true, "", "dumb", false},
	} {
		e := Env{StdoutTerminal: c.terminal, Getenv: func(name string) string {
			return map[string]string{"NO_COLOR": c.noColor, "TERM": c.term}[name]
		}}
		if got := e.colour(); got != c.want {
			t.Errorf("%+v: %v", c, got)
		}
	}
}
