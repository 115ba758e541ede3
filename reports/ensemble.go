package reports

import (
	"bytes"
	"fmt"
	"io"
	"reflect"
	"sort"
	"strings"

	"github.com/mattn/go-runewidth"

	"cycle/carbon/record"
)

// EnsembleJSON writes the summary of an ensemble as summary.json, by the rules of
// SummaryJSON: the keys are those of record.Ensemble and of what it holds.
//
//	format         1; kind is "ensemble"
//	scenario, hash, version, seed, design, members
//	uncertain      the inputs that were drawn: key, distribution, column of members.parquet
//	shares         of every outcome: count, share with its 95 % interval, and with all
//	               undecided members added; index of a typical member
//	liquid_water   probability that surface water is still liquid, with its band
//	cumulative_incidence   probability of each failure by a time, with its band
//	dates          quantiles of every failure and mark, with their 95 % intervals
//	sensitivities  of every failure: first-order and total indices, partial rank
//	               correlations, share explained by the choices of law
//	by_law         outcomes and dates under each choice
//	borders        pairs of close members with different outcomes
//	at_ages        spread of temperature, CO2 and pH at the ages asked for
//	statuses       how the histories ended
//	more_members   what more members would be worth
//	works, warnings
func EnsembleJSON(w io.Writer, e *record.Ensemble) error {
	var b bytes.Buffer
	if err := writeJSON(&b, reflect.ValueOf(*e), ""); err != nil {
		return err
	}
	b.WriteByte('\n')
	_, err := w.Write(b.Bytes())
	return err
}

// EnsembleTerminal writes what the members have in common for people.
func EnsembleTerminal(w io.Writer, e *record.Ensemble, opt TerminalOptions) error {
	if opt.Width == 0 {
		opt.Width = 80
	}
	t := &terminal{width: min(max(opt.Width, 60), 100), color: opt.Color}
	right := short(clean(e.Version)+"  "+runewidth.Truncate(clean(e.Hash), 12, ""), t.width/2)
	title := runewidth.Truncate(clean(e.Title), t.width-2-runewidth.StringWidth(right), "…")
	t.line(t.bold(title) + strings.Repeat(" ", max(1, t.width-runewidth.StringWidth(title)-runewidth.StringWidth(right))) + t.dim(right))
	t.line(clean(fmt.Sprintf("%d members, seed %d, %s", e.Members, e.Seed, e.Design)))
	t.line("")
	t.line(t.dim(fmt.Sprintf("%-28s %8s  %-15s  %s", "outcome", "share", "95 %", "dates: 5, 50, 95 %, Gyr")))
	order := append([]record.FateShare(nil), e.Shares...)
	sort.SliceStable(order, func(i, j int) bool { return order[i].Count > order[j].Count })
	for _, s := range order {
		dates := ""
		for _, d := range e.Dates {
			if d.Failure && d.Clock == string(s.Kind) && len(d.Quantiles) == 5 {
				dates = fmt.Sprintf("%.3f  %.3f  %.3f", d.Quantiles[0].TimeGyr.Value, d.Quantiles[2].TimeGyr.Value, d.Quantiles[4].TimeGyr.Value)
			}
		}
		band := fmt.Sprintf("%.2f to %.2f", 100*s.Share.Low, 100*s.WithAll.High)
		t.line(fmt.Sprintf("%-28s %6.2f %%  %-15s  %s", clean(string(s.Kind)), 100*s.Share.Value, band, dates))
	}
	if e.Undecided > 0 {
		t.line(fmt.Sprintf("%-28s %6.2f %%  counted both ways in the intervals above", "undecided", 100*float64(e.Undecided)/float64(e.Independent)))
	}
	t.line("")
	for _, s := range e.Sensitive {
		var parts []string
		in := append([]record.Sensitivity(nil), s.Inputs...)
		index := func(x record.Sensitivity) record.Interval {
			if known(x.Total.Value) {
				return x.Total
			}
			return x.First
		}
		sort.SliceStable(in, func(i, j int) bool { return index(in[i]).Value > index(in[j]).Value })
		for _, x := range in {
			if v := index(x); known(v.Value) && v.Low > 0.005 && len(parts) < 3 {
				parts = append(parts, fmt.Sprintf("%s %.0f %% (%.0f to %.0f)", clean(x.Input), 100*v.Value, 100*v.Low, 100*v.High))
			}
		}
		if len(parts) == 0 {
			continue
		}
		words := clean(s.Clock) + ": " + strings.Join(parts, ", ")
		if known(s.Laws.Value) {
			words += fmt.Sprintf("; choices of law %.0f %%", 100*s.Laws.Value)
		}
		first := "decided by"
		if decided(t.out) {
			first = ""
		}
		t.item(first, words, 2)
	}
	if e.Worth != "" {
		t.line("")
		t.item("more", clean(e.Worth), 6)
	}
	t.doubts(e.Warnings, 6)
	_, err := io.WriteString(w, strings.Join(t.out, "\n")+"\n")
	return err
}

// decided tells whether the list of sensitivities has begun.
func decided(lines []string) bool {
	for _, l := range lines {
		if strings.Contains(l, "decided by") {
			return true
		}
	}
	return false
}
