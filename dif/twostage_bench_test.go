package dif

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
	"time"
)

// benchmarkRunner returns a runner whose answers are packed already: binary items under a
// Rasch model with a fifth of the items harder for every group but the first, so that both
// stages of purification have work to do.
func benchmarkRunner(candidates, items, groups int) (*runner, []int16) {
	r := rand.New(rand.NewPCG(11, 13))
	d := &Data{Answers: NewAnswers(items)}
	p := &packed{words: (items + 63) / 64, data: d, first: make([]int, items+1), sets: []presented{{form: -1}}}
	for i := range items {
		d.Items = append(d.Items, Item{ID: fmt.Sprint("item", i), Version: "1", Role: RoleOperational, MaxScore: 1})
		p.first[i+1] = i + 1
		p.sets[0].items = append(p.sets[0].items, true)
	}
	// Thresholds by ability class keep the set-up short: one random number per answer.
	const classes = 64
	chance := make([][][]uint32, groups)
	for g := range chance {
		chance[g] = make([][]uint32, classes)
		for k := range chance[g] {
			theta := normalQuantile((float64(k) + 0.5) / classes)
			for i := range items {
				b := -2 + 4*float64(i)/float64(items)
				if g > 0 && i%5 == 0 {
					b += 0.8
				}
				chance[g][k] = append(chance[g][k], uint32(math.MaxUint32/(1+math.Exp(b-theta))))
			}
		}
	}
	p.rows = make([]uint64, candidates*p.words)
	p.gaps, p.set = make([]bool, candidates), make([]int32, candidates)
	of := make([]int16, candidates)
	for c := range candidates {
		g := c % groups
		of[c] = int16(g)
		limits := chance[g][r.IntN(classes)]
		for i := range items {
			if r.Uint32() < limits[i] {
				p.rows[c*p.words+i/64] |= 1 << (i % 64)
			}
		}
	}
	run := &runner{plan: DefaultPlan(), data: d, workers: 1, packed: p, variable: MatchTotal}
	for i := range items {
		run.matching = append(run.matching, i)
	}
	return run, of
}

// BenchmarkMHTwoStage measures five comparisons with a common reference group, two stages
// each: count tables, Mantel-Haenszel statistics and letters of both stages. x_pass is the
// time in units of one counting pass over all candidates.
func BenchmarkMHTwoStage(b *testing.B) {
	b.Run("1e6x100x5", func(b *testing.B) {
		r, of := benchmarkRunner(1_000_000, 100, 6)
		a := r.packed.arrange(of, 6)
		mask := r.packed.mask(func(int) bool { return true })
		groups := []int{0, 1, 2, 3, 4, 5}
		pass := func() {
			t := &tabulator{arrangement: a, workers: 1}
			if _, err := t.tabulate(context.Background(), mask, groups); err != nil {
				b.Fatal(err)
			}
		}
		both := func() {
			t := &tabulator{arrangement: a, workers: 1}
			first, err := t.tabulate(context.Background(), mask, groups)
			if err != nil {
				b.Fatal(err)
			}
			for focal := 1; focal < 6; focal++ {
				k := &comparing{runner: r, tabulator: t, groups: [2]int{0, focal}}
				k.first = first.pair(a, k.groups)
				if err := k.purify(context.Background()); err != nil {
					b.Fatal(err)
				}
				if len(k.out.Matching.RemovedItems) == 0 || len(k.out.Matching.Stages) != 2 {
					b.Fatalf("the second stage had nothing to do: %v", k.out.Matching.RemovedItems)
				}
			}
		}
		var ratios, seconds []float64
		for b.Loop() {
			for range 7 {
				start := time.Now()
				pass()
				one := time.Since(start)
				start = time.Now()
				both()
				two := time.Since(start)
				ratios = append(ratios, two.Seconds()/one.Seconds())
				seconds = append(seconds, two.Seconds())
			}
		}
		slices.Sort(ratios)
		slices.Sort(seconds)
		b.ReportMetric(ratios[len(ratios)/2], "x_pass")
		b.ReportMetric(1000*seconds[len(seconds)/2], "ms")
	})
}
