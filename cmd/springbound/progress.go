package main

import (
	"fmt"
	"io"
	"os"
	"strings"
	"time"
)

// streams are where a run prints: results to out, everything else to err.
type streams struct {
	out, err io.Writer
	terminal bool // err is a terminal: progress is shown
}

func isTerminal(f *os.File) bool {
	info, err := f.Stat()
	return err == nil && info.Mode()&os.ModeCharDevice != 0
}

// progress shows one line that is overwritten, at most ten times a second, on a terminal only.
type progress struct {
	w     io.Writer
	on    bool
	last  time.Time
	shown int
	start time.Time
}

func newProgress(s streams, quiet bool) *progress {
	return &progress{w: s.err, on: s.terminal && !quiet, start: time.Now()}
}

// report tells how far a stage is. At the start of each, what earlier ones left is collected.
func (p *progress) report(stage string, done, total int) {
	if done == 0 {
		collectAtStage()
	}
	if !p.on || (done < total && time.Since(p.last) < 100*time.Millisecond && done > 0) {
		return
	}
	p.last = time.Now()
	line := fmt.Sprintf("%6.1f s  %s", time.Since(p.start).Seconds(), stage)
	if total > 1 {
		line += fmt.Sprintf("  %d of %d", done, total)
	}
	pad := strings.Repeat(" ", max(0, p.shown-len(line)))
	fmt.Fprint(p.w, "\r"+line+pad)
	p.shown = len(line)
}

// clear wipes the line before anything else is printed.
func (p *progress) clear() {
	if p.on && p.shown > 0 {
		fmt.Fprint(p.w, "\r"+strings.Repeat(" ", p.shown)+"\r")
		p.shown = 0
	}
}
