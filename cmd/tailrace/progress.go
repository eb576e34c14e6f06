package main

import (
	"fmt"
	"os"
	"time"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
	"golang.org/x/term"
)

// progress shows how far a work of many like parts is: a bar with the time left on a
// terminal, a plain line now and then elsewhere. All goes to stderr.
type progress struct {
	parts        string // what is counted, such as "trajectories"
	total, begun int
	start, last  time.Time
	pages        *mpb.Progress
	bar          *mpb.Bar
}

// every is how often a line is printed where there is no terminal.
const every = 15 * time.Second

func newProgress(parts string, total, begun int) *progress {
	p := &progress{parts: parts, total: total, begun: begun, start: time.Now(), last: time.Now()}
	if term.IsTerminal(int(os.Stderr.Fd())) {
		p.pages = mpb.New(mpb.WithOutput(os.Stderr), mpb.WithWidth(48))
		p.bar = p.pages.AddBar(int64(total),
			mpb.PrependDecorators(decor.Name(parts+" "), decor.CountersNoUnit("%d of %d")),
			mpb.AppendDecorators(decor.Any(func(decor.Statistics) string { return p.left() })))
		p.bar.SetCurrent(int64(begun))
	}
	return p
}

// left says how much longer it takes.
func (p *progress) left() string {
	now := int(p.bar.Current())
	if now <= p.begun {
		return "estimating"
	}
	return p.estimate(now) + " left"
}

func (p *progress) estimate(now int) string {
	perOne := time.Since(p.start) / time.Duration(now-p.begun)
	return (perOne * time.Duration(p.total-now)).Round(time.Second).String()
}

// update takes the number of parts that are finished.
func (p *progress) update(now int) {
	if p.bar != nil {
		p.bar.SetCurrent(int64(now))
		return
	}
	if time.Since(p.last) >= every && now < p.total {
		p.last = time.Now()
		fmt.Fprintf(os.Stderr, "%d of %d %s, %s left\n", now, p.total, p.parts, p.estimate(now))
	}
}

// end takes the bar away.
func (p *progress) end() {
	if p.bar != nil {
		p.bar.Abort(true)
		p.pages.Wait()
	}
}
