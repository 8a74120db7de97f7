package main

import (
	"fmt"
	"io"
	"os"
	"strings"
)

// progress shows how far a command is: a bar that is drawn over on a terminal, else a
// line at the start of each stage.
type progress struct {
	w        io.Writer
	terminal bool
	stage    string
	drawn    bool
}

func newProgress(w io.Writer) *progress {
	p := &progress{w: w}
	if f, ok := w.(*os.File); ok {
		if info, err := f.Stat(); err == nil {
			p.terminal = info.Mode()&os.ModeCharDevice != 0
		}
	}
	return p
}

var stageWords = map[string]string{"score": "Scoring and packing answers", "compare": "Comparing groups"}

// rows tells how many rows have been read. Without a terminal nothing is printed, since
// what was taken as items stands first.
func (p *progress) rows(n int) {
	if p.terminal {
		p.draw(fmt.Sprintf("Reading responses: %d rows", n))
	}
}

// step tells how far a stage of the engine is.
func (p *progress) step(stage string, done, total int) {
	words := stageWords[stage]
	if words == "" {
		words = stage
	}
	if p.terminal {
		const width = 30
		full := 0
		if total > 0 {
			full = width * done / total
		}
		p.draw(fmt.Sprintf("%-28s [%s%s] %d of %d", words, strings.Repeat("=", full), strings.Repeat(".", width-full), done, total))
		return
	}
	if p.stage != stage {
		p.stage = stage
		fmt.Fprintln(p.w, words)
	}
}

func (p *progress) draw(line string) {
	p.drawn = true
	fmt.Fprintf(p.w, "\r\x1b[K%s", line)
}

// end clears the bar.
func (p *progress) end() {
	if p.drawn {
		fmt.Fprint(p.w, "\r\x1b[K")
		p.drawn = false
	}
}
