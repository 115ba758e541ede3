package ensemble

import (
	"context"
	"math"
	"sync"
	"testing"

	"cycle/carbon/record"
	"cycle/scenarios"
)

// Members of the Earth's ensemble come to the same outcome and dates at a tighter
// tolerance.
func TestLabelsStable(t *testing.T) {
	const n = 160
	plan := func(tolerance string) *Plan {
		r, err := scenarios.Load("earth_uncertain", []string{"solver.tolerance=" + tolerance})
		if err != nil {
			t.Fatal(err)
		}
		p, err := NewPlan(r, "test", 1, Sobol, n)
		if err != nil {
			t.Fatal(err)
		}
		return p
	}
	a, b := plan("1e-5"), plan("1e-6")
	ctx := context.Background()
	var mu sync.Mutex
	var wg sync.WaitGroup
	kinds := map[record.Kind]int{}
	worst := 0.0
	for w := range 2 {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for i := w; i < n; i += 2 {
				x, _ := a.Member(ctx, i)
				y, _ := b.Member(ctx, i)
				mu.Lock()
				kinds[x.Kind]++
				if d := math.Abs(x.TimeGyr-y.TimeGyr) / x.TimeGyr; x.Kind != y.Kind || d > 1e-3 {
					t.Errorf("member %d: %s at %v, tighter %s at %v", i, x.Kind, x.TimeGyr, y.Kind, y.TimeGyr)
				} else {
					worst = math.Max(worst, d)
				}
				mu.Unlock()
			}
		}()
	}
	wg.Wait()
	t.Logf("%v, dates to %.1e", kinds, worst)
	if kinds[record.Undecided] > 0 {
		t.Errorf("%d undecided", kinds[record.Undecided])
	}
}

// BenchmarkEarthMember is the mean cost of a member of the Earth's ensemble.
func BenchmarkEarthMember(b *testing.B) {
	r, err := scenarios.Load("earth_uncertain", nil)
	if err != nil {
		b.Fatal(err)
	}
	p, err := NewPlan(r, "test", 1, Sobol, 1<<20)
	if err != nil {
		b.Fatal(err)
	}
	i := 0
	for b.Loop() {
		if _, err := p.Member(context.Background(), i); err != nil {
			b.Fatal(err)
		}
		i++
	}
}

// BenchmarkEarthTwoWorkers is the same on two workers: twice the work in the same
// time when nothing is shared.
func BenchmarkEarthTwoWorkers(b *testing.B) {
	r, err := scenarios.Load("earth_uncertain", nil)
	if err != nil {
		b.Fatal(err)
	}
	p, err := NewPlan(r, "test", 1, Sobol, 1<<20)
	if err != nil {
		b.Fatal(err)
	}
	b.ResetTimer()
	var wg sync.WaitGroup
	for w := range 2 {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for i := w; i < b.N; i += 2 {
				p.Member(context.Background(), i)
			}
		}()
	}
	wg.Wait()
}
