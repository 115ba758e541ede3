package main

import (
	"os"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
	"golang.org/x/term"
)

// newProgress returns what to hand to long work, and what clears the bar when it
// is over. Nothing is shown where standard error is no terminal or the user
// wants quiet.
func newProgress(what string, quiet bool) (step func(done, total int), clear func()) {
	if quiet || !term.IsTerminal(int(os.Stderr.Fd())) {
		return nil, func() {}
	}
	p := mpb.New(mpb.WithOutput(os.Stderr), mpb.WithWidth(48))
	bar := p.AddBar(0, mpb.PrependDecorators(decor.Name(what+" ")), mpb.AppendDecorators(decor.CountersNoUnit("%d of %d "), decor.Elapsed(decor.ET_STYLE_GO)))
	step = func(done, total int) {
		bar.SetTotal(int64(total), false)
		bar.SetCurrent(int64(done))
	}
	return step, func() {
		bar.Abort(true)
		p.Wait()
	}
}
