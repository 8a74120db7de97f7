package dif

import (
	"context"
	"math"
	"slices"
)

// findings tests every item under the reported matching score.
func (k *comparing) findings(ctx context.Context) ([]Finding, error) {
	findings := make([]Finding, len(k.data.Items))
	coverages := make([]coverage, len(findings))
	var rest []ItemRest
	if k.external != nil {
		rest = k.externalItemRest(k.groups)
	}
	err := k.eachItem(ctx, func(i int, b *itemTabler) {
		f := &findings[i]
		if rest != nil {
			f.ItemRest = rest[i]
		} else {
			f.ItemRest = b.of(k.first, i).itemRest()
		}
		t := b.of(k.reported, i)
		coverages[i] = t.cover()
		k.finding(f, i, t, &coverages[i])
	})
	if err != nil {
		return nil, err
	}
	adjust(findings)
	for i := range findings {
		f := &findings[i]
		f.Warnings = f.warnings(&coverages[i], k.plan.Criteria)
	}
	return findings, nil
}

// finding fills everything about one item that does not need the other items.
func (k *comparing) finding(f *Finding, i int, t *ItemTable, c *coverage) {
	item := &k.data.Items[i]
	f.Item, f.Version = item.ID, item.Version
	f.NReference, f.NFocal = c.n[0], c.n[1]
	f.NMatchedReference, f.NMatchedFocal = c.matched[0], c.matched[1]
	f.StrataUsed, f.StrataInformative, f.NInformative = c.comparable, c.informative, c.informativeN
	points := max(1, item.MaxScore)
	p := [2]float64{ratio(c.scoreSum[0], c.n[0]*points), ratio(c.scoreSum[1], c.n[1]*points)}
	f.PReference, f.PFocal = number(p[0]), number(p[1])
	if t.Binary() {
		f.DifficultyReference, f.DifficultyFocal = number(normalDelta(p[0])), number(normalDelta(p[1]))
	}
	f.Strata = t.summaries(c.comparable)
	f.Results = Results{}
	if t.Categories > 1 {
		for _, m := range Methods() {
			if !slices.Contains(k.plan.Methods, m.ID()) {
				continue
			}
			if r := m.Test(t, k.plan.Criteria); r != nil {
				f.Results = append(f.Results, MethodResult{m.ID(), r})
			}
		}
	}
	f.classify(t.Categories, c, k.plan.Criteria)
}

// summaries returns the comparable strata, n of them.
func (t *ItemTable) summaries(n int) []StratumSummary {
	out := make([]StratumSummary, 0, n)
	for k, s := range t.Strata {
		var count, sum [2]int
		for g := range count {
			for x, m := range t.group(k, g) {
				count[g] += int(m)
				sum[g] += x * int(m)
			}
		}
		if count[0] > 0 && count[1] > 0 {
			out = append(out, StratumSummary{
				Score: s.Score, Set: s.Set,
				NReference: count[0], MeanReference: ratio(sum[0], count[0]),
				NFocal: count[1], MeanFocal: ratio(sum[1], count[1]),
			})
		}
	}
	return out
}

// classify gives the finding its letter, or the first reason why it has none.
func (f *Finding) classify(categories int, c *coverage, criteria Criteria) {
	k := &f.Classification
	reason := c.noVerdict(categories > 1, criteria)
	mh := f.MantelHaenszel()
	if mh != nil {
		k.Basis = text(idMantelHaenszel)
		decide := mh.PValue
		if criteria.ContinuityCorrection {
			decide = mh.PValueCorrected
		}
		k.PValue = decide
		k.ComputedClass = letterOf(mh, decide, criteria.ClassAlpha)
		k.ClassIfCorrected = letterOf(mh, mh.PValueCorrected, criteria.ClassAlpha)
	}
	switch {
	case k.ComputedClass != nil:
	case categories < 2:
		k.Detail = text(DetailNoKey)
	case c.n[0] == 0 || c.n[1] == 0:
		k.Detail = text(DetailNoResponses)
	case categories > 2:
		k.Detail = text(DetailMethodNotAvailable)
	case mh == nil:
		k.Detail = text(DetailNoClassifyingMethod)
	case mh.ChiSquare != nil && mh.Delta == nil:
		k.Detail = text(DetailInfiniteOddsRatio)
	default:
		k.Detail = text(DetailNoInformativeStrata)
	}
	if reason == "" && k.ComputedClass == nil {
		reason = ReasonNotEstimable
	}
	if reason != "" {
		k.Reason = &reason
		return
	}
	k.Class = k.ComputedClass
}

func letterOf(mh *MantelHaenszelResult, p *float64, alpha float64) *string {
	if mh.Delta == nil || mh.DeltaSE == nil || p == nil {
		return nil
	}
	if letter, ok := Letter(*mh.Delta, *mh.DeltaSE, *p, alpha); ok {
		return &letter
	}
	return nil
}

// adjust sets the Benjamini-Hochberg values: the family is every item of the
// comparison that has a p-value.
func adjust(findings []Finding) {
	p := make([]float64, len(findings))
	for i := range findings {
		p[i] = math.NaN()
		if v := findings[i].Classification.PValue; v != nil {
			p[i] = *v
		}
	}
	for i, q := range benjaminiHochberg(p) {
		if mh := findings[i].MantelHaenszel(); mh != nil {
			mh.QValue = number(q)
		}
	}
}
