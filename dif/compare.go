package dif

import (
	"context"
	"math"
	"sync"
	"sync/atomic"
)

// comparing carries one comparison through its stages.
type comparing struct {
	*runner
	*tabulator
	first    *pairing // tables of the stage-1 score
	reported *pairing // tables the findings come from
	groups   [2]int   // reference and focal group of the arrangement
	refused  bool     // purification would have left too few items
	lost     [2]int   // candidates at levels without the other group, stage 1
	noScore  [2]int   // labelled candidates without the external score
	moments  [2]scoreMoments
	out      Comparison
}

// compare fills the comparison of the evidence.
func (k *comparing) compare(ctx context.Context, c labelled) error {
	k.out = Comparison{Grouping: c.grouping, Reference: c.reference, Focal: c.focal, Warnings: []Warning{}}
	for g := range k.moments {
		k.moments[g] = k.groupMoments(k.first.tabulation, k.groups[g])
	}
	k.lost = k.first.unmatched(k.groups[0], k.groups[1])
	k.out.Groups = Groups{
		Reference:  k.group(0),
		Focal:      k.group(1),
		Difference: number(standardizedDifference(k.moments[0], k.moments[1])),
	}
	k.out.Matching = Matching{
		Variable: k.variable, Levels: k.plan.Matching.Levels, RemovedItems: []string{}, Stages: []Stage{}, Sets: k.sets(),
		Reliability:      number(k.reliability(k.first.tabulation, k.matching, k.groups)),
		ScoreCorrelation: number(k.scoreCorrelation(k.first.mask, k.groups)),
	}
	if err := k.purify(ctx); err != nil {
		return err
	}
	findings, err := k.findings(ctx)
	if err != nil {
		return err
	}
	k.out.Items = findings
	k.out.Summary = Summarize(findings, k.plan.Criteria)
	return nil
}

func (k *comparing) group(g int) Group {
	m := k.moments[g]
	return Group{N: m.n, Mean: number(m.mean), SD: number(m.sd()), Unmatched: k.lost[g], NoScore: k.noScore[g]}
}

// sets describes the presented sets that hold candidates of both groups, where
// candidates are matched within them.
func (k *comparing) sets() []PresentedSet {
	a := k.arrangement
	if len(a.packed.sets) < 2 {
		return nil
	}
	n := make([][2]int, len(a.sets)+1)
	for _, r := range a.runs {
		for g := range k.groups {
			if r.group == k.groups[g] {
				n[r.place][g] += r.to - r.from
			}
		}
	}
	out := []PresentedSet{}
	for place := 1; place < len(n); place++ {
		if n[place][0] == 0 || n[place][1] == 0 {
			continue
		}
		set := a.packed.sets[a.sets[place-1]]
		p := PresentedSet{Set: place, NReference: n[place][0], NFocal: n[place][1]}
		for _, in := range set.items {
			if in {
				p.Items++
			}
		}
		if set.form >= 0 {
			p.Form = text(k.data.Forms[set.form].ID)
		}
		out = append(out, p)
	}
	return out
}

// purify finds the items left out of the matching score, and the tables of the score
// that is left. Two-stage refinement (Holland & Thayer 1988): the items classed C under
// the whole score leave it; each keeps its own score in its own analysis.
func (k *comparing) purify(ctx context.Context) error {
	k.reported = k.first
	large, err := k.stage(ctx, 1, k.first, nil)
	if err != nil || k.plan.Matching.Purification != PurifyTwoStage || k.variable == MatchExternal {
		return err
	}
	if !mayRemove(len(k.matching), len(large)) {
		k.refused = len(large) > 0
		large = nil
	}
	if len(large) > 0 {
		keep := without(k.matching, large)
		in := make([]bool, len(k.data.Items))
		for _, i := range keep {
			in[i] = true
		}
		second, err := k.tabulate(ctx, k.packed.mask(func(i int) bool { return in[i] }), k.groups[:])
		if err != nil {
			return err
		}
		k.reported = second.pair(k.arrangement, k.groups)
	}
	k.out.Matching.RemovedItems = k.names(large)
	_, err = k.stage(ctx, 2, k.reported, large)
	return err
}

func (k *comparing) names(items []int) []string {
	names := []string{}
	for _, i := range items {
		names = append(names, k.data.Items[i].ID)
	}
	return names
}

// stage classes every item under one matching score, records it, and returns the
// matching items that the next score would leave out.
func (k *comparing) stage(ctx context.Context, number int, tables *pairing, removed []int) ([]int, error) {
	items := make([]StageItem, len(k.data.Items))
	leaves := make([]bool, len(items))
	err := k.eachItem(ctx, func(i int, b *itemTabler) {
		items[i], leaves[i] = k.stageItem(i, b.of(tables, i))
	})
	if err != nil {
		return nil, err
	}
	k.out.Matching.Stages = append(k.out.Matching.Stages, Stage{Stage: number, RemovedItems: k.names(removed), Items: items})
	var large []int
	for _, i := range k.matching {
		if leaves[i] {
			large = append(large, i)
		}
	}
	return large, nil
}

// stageItem classes one item; leaves reports a class C, or an odds ratio without limit
// for which the exact conditional test rejects |D-DIF| <= 1.
func (k *comparing) stageItem(i int, t *ItemTable) (s StageItem, leaves bool) {
	s.Item = k.data.Items[i].ID
	if !t.Binary() {
		s.Detail = text(DetailMethodNotAvailable)
		if t.Categories < 2 {
			s.Detail = text(DetailNoKey)
		}
		return s, false
	}
	m := sumStrata(t)
	plain, corrected := m.chiSquare()
	chi := plain
	if k.plan.Criteria.ContinuityCorrection {
		chi = corrected
	}
	delta, se := m.delta()
	p := chiSquareTail(chi, 1)
	s.ChiSquare, s.PValue, s.Delta, s.DeltaSE = number(chi), number(p), number(delta), number(se)
	if letter, ok := Letter(delta, se, p, k.plan.Criteria.ClassAlpha); ok {
		s.ComputedClass = &letter
		return s, isC(letter)
	}
	s.Detail = text(DetailNoInformativeStrata)
	if d := m.limitless(); d != 0 {
		s.Detail = text(DetailInfiniteOddsRatio)
		leaves = extremeProbability(t, d) < 0.05
	}
	return s, leaves
}

// eachItem calls work for every item, on several goroutines, each with a tabler of its
// own, and stops between items when ctx is done.
func (k *comparing) eachItem(ctx context.Context, work func(item int, b *itemTabler)) error {
	var next atomic.Int64
	var wg sync.WaitGroup
	for range k.runner.workers {
		wg.Go(func() {
			var b itemTabler
			for ctx.Err() == nil {
				i := int(next.Add(1)) - 1
				if i >= len(k.data.Items) {
					return
				}
				work(i, &b)
			}
		})
	}
	wg.Wait()
	return ctx.Err()
}

// Summarize counts findings: their letters, the reasons of those without one, and what
// chance alone would give among them. Reports use it for the findings they may show.
func Summarize(findings []Finding, c Criteria) Summary {
	s := Summary{NoVerdict: Counts{}}
	for _, l := range Letters() {
		s.Classes = append(s.Classes, Count{Name: l})
	}
	for _, r := range Reasons() {
		n := 0
		for i := range findings {
			if reason := findings[i].Classification.Reason; reason != nil && *reason == r {
				n++
			}
		}
		if n > 0 {
			s.NoVerdict = append(s.NoVerdict, Count{r, n})
		}
	}
	for i := range findings {
		f := &findings[i]
		if f.Classification.PValue != nil {
			s.ExpectedByChance.Tests++
		}
		if f.Classification.Class == nil {
			continue
		}
		for j := range s.Classes {
			if s.Classes[j].Name == *f.Classification.Class {
				s.Classes[j].N++
			}
		}
		if hasWarning(f.Warnings, WarnLargeNotExcluded) {
			s.LargeDifferenceNotExcluded++
		}
		if mh := f.MantelHaenszel(); mh != nil && mh.DeltaSE != nil {
			bOrC, large := chanceOfLetters(*mh.DeltaSE, c.ClassAlpha)
			s.ExpectedByChance.BOrC += bOrC
			s.ExpectedByChance.C += large
		}
	}
	s.ExpectedByChance.Significant = c.ClassAlpha * float64(s.ExpectedByChance.Tests)
	return s
}

func hasWarning(warnings []Warning, code string) bool {
	for _, w := range warnings {
		if w.Code == code {
			return true
		}
	}
	return false
}

func ratio(a, b int) float64 {
	if b == 0 {
		return math.NaN()
	}
	return float64(a) / float64(b)
}
