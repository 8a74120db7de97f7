package dif

import (
	"strings"
	"testing"
)

// Each warning stands where it applies and nowhere else.
func TestWarningsOfAFinding(t *testing.T) {
	t.Parallel()
	// The plain case: letter A with a narrow interval, many candidates, nothing to say.
	plain := func() (*Finding, *coverage) {
		f := &Finding{Results: Results{
			{idMantelHaenszel, &MantelHaenszelResult{
				ChiSquare: number(1), PValue: number(0.3), ChiSquareCorrected: number(0.9), PValueCorrected: number(0.34), OddsRatio: number(0.9),
				Delta: number(0.2), DeltaSE: number(0.2), DeltaLow: number(-0.2), DeltaHigh: number(0.6),
			}},
			{idBreslowDay, &BreslowDayResult{Statistic: number(9), Trend: Trend{number(1), number(0.3)}}},
		}}
		f.PReference, f.PFocal = number(0.6), number(0.5)
		f.ItemRest = ItemRest{number(0.4), number(0.3)}
		f.Classification = Classification{Class: text(ClassA), ComputedClass: text(ClassA), ClassIfCorrected: text(ClassA)}
		return f, &coverage{n: [2]int{500, 200}, matched: [2]int{495, 180}, medianT: 20}
	}
	for _, c := range []struct {
		name   string
		change func(f *Finding, c *coverage)
		want   string
	}{
		{"nothing", func(*Finding, *coverage) {}, ""},
		{"low end at -1.5", func(f *Finding, _ *coverage) { f.MantelHaenszel().DeltaLow = number(-1.5) }, WarnLargeNotExcluded},
		{"high end at 1.5", func(f *Finding, _ *coverage) { f.MantelHaenszel().DeltaHigh = number(1.5) }, WarnLargeNotExcluded},
		{"just inside", func(f *Finding, _ *coverage) {
			f.MantelHaenszel().DeltaLow, f.MantelHaenszel().DeltaHigh = number(-1.4999), number(1.4999)
		}, ""},
		{"wide, without a class", func(f *Finding, _ *coverage) {
			f.MantelHaenszel().DeltaHigh = number(3)
			f.Classification.Class = nil
		}, ""},
		{"wide, another letter", func(f *Finding, _ *coverage) {
			f.MantelHaenszel().DeltaHigh = number(3)
			f.Classification.Class, f.Classification.ComputedClass, f.Classification.ClassIfCorrected = text(ClassBPlus), text(ClassBPlus), text(ClassBPlus)
		}, ""},
		{"no finite odds ratio", func(f *Finding, _ *coverage) { f.MantelHaenszel().Delta = nil }, WarnDirectionWithoutLimit},
		{"other letter under the correction", func(f *Finding, _ *coverage) { f.Classification.ClassIfCorrected = text(ClassBPlus) }, WarnLetterDependsOnTest},
		{"trend", func(f *Finding, _ *coverage) { f.BreslowDay().Trend.PValue = number(0.049) }, WarnNonUniform},
		{"trend at the level", func(f *Finding, _ *coverage) { f.BreslowDay().Trend.PValue = number(0.05) }, ""},
		{"sparse levels", func(_ *Finding, c *coverage) { c.medianT = 19.5 }, WarnBreslowDaySparse},
		{"focal candidates unmatched", func(_ *Finding, c *coverage) { c.matched[1] = 179 }, WarnFocalUnmatched},
		{"reference candidates unmatched", func(_ *Finding, c *coverage) { c.matched[0] = 100 }, ""},
		{"very easy", func(f *Finding, _ *coverage) { f.PFocal = number(0.951) }, WarnVeryEasy},
		{"very easy, not estimable", func(f *Finding, _ *coverage) {
			f.PFocal = number(0.951)
			f.Classification.Class, f.Classification.ComputedClass, f.Classification.ClassIfCorrected = nil, nil, nil
		}, ""},
		{"low item-rest", func(f *Finding, _ *coverage) { f.ItemRest.Focal = number(0.09) }, WarnLowItemRest},
		{"negative item-rest", func(f *Finding, _ *coverage) { f.ItemRest.Reference = number(-0.01) }, WarnNegativeItemRest},
	} {
		f, cover := plain()
		c.change(f, cover)
		var codes []string
		for _, w := range f.warnings(cover, DefaultPlan().Criteria) {
			codes = append(codes, w.Code)
			if w.Message == "" || strings.Contains(w.Message, "%!") {
				t.Errorf("%s: message %q", c.name, w.Message)
			}
		}
		if got := strings.Join(codes, " "); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}

func TestWarningsOfAComparison(t *testing.T) {
	t.Parallel()
	codes := func(e *Evidence) string {
		var s []string
		for _, w := range e.Comparisons[0].Warnings {
			s = append(s, w.Code)
		}
		return strings.Join(s, " ")
	}
	// 6.6 % of the women of the questionnaire have a score that no man has.
	if got := codes(mustRun(t, openPlan("gender", "F", "M", PurifyNone), verbalBinary(t))); got != WarnCandidatesLost {
		t.Errorf("verbal aggression: %q", got)
	}
	// One form of two without declared items, a total over all, an item without a key.
	d := mixedData(21, 1500, 12)
	p := openPlan("g", "a", "b", PurifyNone)
	p.Matching.Variable = MatchTotal
	got := codes(mustRun(t, p, d))
	for _, want := range []string{WarnSetsPooled, WarnUnscoredItems, WarnLowReliability} {
		if !strings.Contains(got, want) {
			t.Errorf("mixed data: %q lacks %s", got, want)
		}
	}
	// More without a label than the smaller group.
	for c := range d.Groupings[0].Codes {
		if d.Groupings[0].Codes[c] == 2 && c%2 == 0 {
			d.Groupings[0].Codes[c] = 0
		}
	}
	if got := codes(mustRun(t, p, d)); !strings.Contains(got, WarnNotStated) {
		t.Errorf("many without a label: %q", got)
	}
}
