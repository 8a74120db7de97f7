package dif

import (
	"strings"
	"testing"
)

// Evidence of the engine agrees with itself, and every kind of tampering is named.
func TestDisagreements(t *testing.T) {
	t.Parallel()
	fresh := func() *Evidence { return mustRun(t, openPlan("gender", "F", "M", PurifyTwoStage), verbalBinary(t)) }
	if d := fresh().Disagreements(); len(d) > 0 {
		t.Fatalf("untouched evidence: %v", d)
	}
	mixed := openPlan("g", "a", "b", PurifyTwoStage)
	for _, variable := range []string{MatchAuto, MatchTotal, MatchTotalWithinForm, MatchExternal} {
		mixed.Matching.Variable = variable
		e, err := Run(t.Context(), mixed, mixedData(4, 5000, 12), Options{})
		if err != nil {
			t.Fatal(err)
		}
		if d := e.Disagreements(); len(d) > 0 {
			t.Errorf("untouched evidence matched by %s: %v", variable, d)
		}
	}
	for _, c := range []struct {
		name   string
		change func(c *Comparison)
		want   string
	}{
		{"class", func(c *Comparison) { c.Items[0].Classification.Class = text(ClassBMinus) }, "class"},
		{"computed class", func(c *Comparison) { c.Items[5].Classification.ComputedClass = text(ClassA) }, "computed class"},
		{"delta", func(c *Comparison) { *c.Items[5].MantelHaenszel().Delta *= 1.0001 }, "mantel_haenszel"},
		{"chi-square", func(c *Comparison) { *c.Items[5].MantelHaenszel().ChiSquare += 1e-6 }, "mantel_haenszel"},
		{"trend", func(c *Comparison) { *c.Items[5].BreslowDay().Trend.Statistic += 1e-6 }, "breslow_day"},
		{"P-DIF", func(c *Comparison) { *c.Items[5].Standardization().PDif += 1e-6 }, "standardization"},
		{"q", func(c *Comparison) { *c.Items[5].MantelHaenszel().QValue /= 2 }, "q-value"},
		{"stratum", func(c *Comparison) { c.Items[5].Strata[3].NFocal++ }, "strata"},
		{"stratum mean", func(c *Comparison) { c.Items[5].Strata[3].MeanFocal = 0.123456 }, "mean"},
		{"matched", func(c *Comparison) { c.Items[5].NMatchedFocal-- }, "matched"},
		{"summary", func(c *Comparison) { c.Summary.Classes[0].N++ }, "summary"},
		{"chance", func(c *Comparison) { c.Summary.ExpectedByChance.C *= 2 }, "chance"},
		{"large", func(c *Comparison) { c.Summary.LargeDifferenceNotExcluded-- }, "large difference"},
		{"removed", func(c *Comparison) { c.Matching.RemovedItems = []string{"S1DoCurse"} }, "S1DoCurse"},
		{"not removed", func(c *Comparison) { c.Matching.RemovedItems = c.Matching.RemovedItems[:1] }, "S2DoCurse"},
		{"stage", func(c *Comparison) { c.Matching.Stages[0].Items[3].ComputedClass = text(ClassCMinus) }, "stage-1"},
		{"items", func(c *Comparison) { c.Items = c.Items[1:] }, "finding"},
		{"max score", func(c *Comparison) { c.Matching.Variable = MatchExternal }, "variable"},
		{"names swapped", func(c *Comparison) { c.Reference, c.Focal = c.Focal, c.Reference }, "plan"},
		{"removed emptied", func(c *Comparison) {
			c.Matching.RemovedItems, c.Matching.Stages[1].RemovedItems = []string{}, []string{}
		}, "not left out"},
		{"stage dropped", func(c *Comparison) { c.Matching.Stages = c.Matching.Stages[:1] }, "stages"},
		{"stage 2", func(c *Comparison) { *c.Matching.Stages[1].Items[7].Delta += 0.1 }, "last stage"},
		{"warnings stripped", func(c *Comparison) { c.Items[0].Warnings = []Warning{} }, "warnings"},
		{"difference", func(c *Comparison) { *c.Groups.Difference += 0.01 }, "standardized difference"},
		{"mean", func(c *Comparison) { *c.Groups.Focal.Mean += 0.5 }, "standardized difference"},
		{"proportion", func(c *Comparison) { *c.Items[4].PFocal += 0.001 }, "mean score"},
		{"difficulty", func(c *Comparison) { *c.Items[4].DifficultyFocal += 0.001 }, "difficulties"},
		{"n", func(c *Comparison) { c.Items[4].NReference = 10000 }, "mean score"},
		{"basis", func(c *Comparison) { c.Items[4].Classification.Basis = text("polytomous") }, "basis"},
		{"warning replaced", func(c *Comparison) { c.Items[0].Warnings[0].Code = WarnVeryEasy }, "warnings do not follow from the statistics"},
		{"comparison warning replaced", func(c *Comparison) { c.Warnings[0].Code = WarnLowReliability }, "warnings do not follow from its numbers"},
		{"comparison warnings stripped", func(c *Comparison) { c.Warnings = []Warning{} }, "warnings"},
		{"comparison warning invented", func(c *Comparison) { c.Warnings = append(c.Warnings, Warning{"x", "y"}) }, "warnings"},
		{"refusal invented", func(c *Comparison) { c.Warnings = append(c.Warnings, Warning{WarnPurificationRefused, "y"}) }, "refused"},
		{"reliability", func(c *Comparison) { c.Matching.Reliability = number(0.5) }, "warnings"},
		{"not stated", func(c *Comparison) { c.Groups.NotStated = 5 }, "sizes"},
		{"group size", func(c *Comparison) { c.Groups.Focal.N = 74 }, "sizes"},
		{"without score", func(c *Comparison) { c.Groups.Focal.NoScore = 7 }, "external"},
		{"correlation", func(c *Comparison) { c.Matching.ScoreCorrelation = number(0.5) }, "external"},
		{"levels", func(c *Comparison) { c.Matching.Levels = LevelsThick }, "levels"},
		{"methods", func(c *Comparison) { c.Items[4].Results = c.Items[4].Results[:2] }, "methods"},
		{"stage names", func(c *Comparison) { c.Matching.Stages[0].Items[4].Item = "other" }, "stage"},
		{"strata order", func(c *Comparison) {
			s := c.Items[4].Strata
			s[0], s[1] = s[1], s[0]
		}, "order"},
		{"reason", func(c *Comparison) {
			c.Items[0].Classification.Class, c.Items[0].Classification.Reason = nil, text(ReasonTooFewCandidates)
		}, "reason"},
	} {
		e := fresh()
		c.change(&e.Comparisons[0])
		d := strings.Join(e.Disagreements(), "\n")
		if !strings.Contains(d, c.want) {
			t.Errorf("%s changed: %q does not mention %q", c.name, d, c.want)
		}
	}
	forged := fresh()
	forged.Inputs.Items[5].MaxScore = 2 // must not switch the checks of the item off
	if d := forged.Disagreements(); len(d) == 0 {
		t.Error("a changed maximum score is not noticed")
	}
	refused := mustRun(t, openPlan("sex", "F", "M", PurifyTwoStage), readScored(t, "../testdata/nz-health-survey/nz-worry.csv", 3))
	if d := refused.Disagreements(); len(d) > 0 {
		t.Errorf("a refused purification: %v", d)
	}
	m := &refused.Comparisons[0].Matching
	m.RemovedItems = []string{"moody"}
	m.Stages[1].RemovedItems = m.RemovedItems
	if d := strings.Join(refused.Disagreements(), "\n"); !strings.Contains(d, "said to have been refused") {
		t.Errorf("an item left out beside a refusal is not noticed: %s", d)
	}
	reworded := fresh()
	reworded.Comparisons[0].Warnings[0].Message = "in other words"
	reworded.Comparisons[0].Items[0].Warnings[0].Message = "in other words"
	if d := reworded.Disagreements(); len(d) > 0 {
		t.Errorf("evidence of a version that words its warnings otherwise: %v", d)
	}
	unmatched := mustRun(t, openPlan("gender", "F", "M", PurifyNone), verbalBinary(t))
	unmatched.Comparisons[0].Groups.Reference.Unmatched, unmatched.Comparisons[0].Warnings = 0, []Warning{}
	if d := strings.Join(unmatched.Disagreements(), "\n"); !strings.Contains(d, "unmatched") {
		t.Errorf("erased lost candidates are not noticed: %s", d)
	}
	noGroupings := fresh()
	noGroupings.Inputs.Groupings = []GroupingCount{}
	if d := noGroupings.Disagreements(); len(d) == 0 {
		t.Error("missing label counts are not noticed")
	}
	e := fresh()
	e.Inputs.CandidatesAnalysed--
	if d := e.Disagreements(); len(d) == 0 {
		t.Error("a lost candidate is not noticed")
	}
	e = fresh()
	if g := e.Inputs.Groupings; len(g) != 1 || len(g[0].Labels) != 2 || g[0].Labels[0] != (LabelCount{"F", 243}) || g[0].Labels[1] != (LabelCount{"M", 73}) {
		t.Fatalf("labels %+v", g)
	}
	e.Inputs.Groupings[0].Labels[1].N++
	if d := e.Disagreements(); len(d) == 0 {
		t.Error("a label count too many is not noticed")
	}
}
