package dif

import (
	"errors"
	"strings"
	"testing"
)

func TestPlanFaults(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		name   string
		change func(p *Plan)
		want   string
	}{
		{"no comparison", func(p *Plan) { p.Comparisons = nil }, "comparisons"},
		{"same labels", func(p *Plan) { p.Comparisons[0].Focal = "a" }, "different labels"},
		{"no focal", func(p *Plan) { p.Comparisons[0].Focal = "" }, "required"},
		{"twice", func(p *Plan) { p.Comparisons = append(p.Comparisons, p.Comparisons[0]) }, "earlier"},
		{"crossing", func(p *Plan) { p.Comparisons[0].Grouping = "g+g" }, "different groupings"},
		{"crossing label", func(p *Plan) { p.Comparisons[0].Grouping = "g+h" }, "one part per grouping"},
		{"later method", func(p *Plan) { p.Methods = []string{"likelihood_ratio"} }, "likelihood_ratio is not part of this version"},
		{"no method", func(p *Plan) { p.Methods = []string{"x"} }, "mantel_haenszel"},
		{"variable", func(p *Plan) { p.Matching.Variable = MatchTotalWithinSet }, "matching.variable"},
		{"thick", func(p *Plan) { p.Matching.Levels = LevelsThick }, "thick is not part of this version"},
		{"iterative", func(p *Plan) { p.Matching.Purification = PurifyIterative }, "iterative is not part of this version"},
		{"empty", func(p *Plan) { p.Missing.Empty = "wrong" }, "by_position"},
		{"code twice", func(p *Plan) { p.Missing.Omitted, p.Missing.Invalid = []string{"-"}, []string{"-"} }, "both omitted and invalid"},
		{"empty code", func(p *Plan) { p.Missing.Omitted = []string{""} }, "missing.empty"},
		{"attempts", func(p *Plan) { p.Attempts = "best" }, "attempts"},
		{"alpha", func(p *Plan) { p.Criteria.ClassAlpha = 1 }, "class_alpha"},
		{"minimum", func(p *Plan) { p.Criteria.MinTotal = -1 }, "minima"},
		{"several", func(p *Plan) {
			p.Groupings["g"] = GroupingRule{Labels: []string{"a", "b"}, Several: "z"}
		}, "several"},
		{"label not stated", func(p *Plan) {
			p.Groupings["g"] = GroupingRule{Labels: []string{"a", "b"}, NotStated: []string{"b"}}
		}, "both labels and not_stated"},
	} {
		p := openPlan("g", "a", "b", PurifyNone)
		c.change(&p)
		if err := errors.Join(p.Validate()...); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want a fault that names %q", c.name, err, c.want)
		}
		if _, err := Run(t.Context(), p, mixedData(1, 50, 7), Options{}); !errors.Is(err, ErrInput) {
			t.Errorf("%s: Run returns %v", c.name, err)
		}
	}
}

func TestPlanAndDataThatDoNotFit(t *testing.T) {
	t.Parallel()
	d := mixedData(1, 60, 7)
	for _, c := range []struct {
		name   string
		change func(p *Plan, d *Data)
		want   string
	}{
		{"grouping", func(p *Plan, _ *Data) { p.Comparisons[0].Grouping = "x" }, "grouping x is not in the data"},
		{"label", func(p *Plan, _ *Data) { p.Comparisons[0].Focal = "z" }, `the label "z"`},
		{"external", func(p *Plan, d *Data) { p.Matching.Variable, d.External = MatchExternal, nil }, "external_score"},
		{"form", func(p *Plan, d *Data) { p.Matching.Variable, d.FormOf = MatchTotalWithinForm, nil }, "form column"},
		{"each and one", func(p *Plan, _ *Data) {
			p.Comparisons = append(p.Comparisons, PlannedComparison{"g", "a", FocalEach})
		}, "stands twice"},
	} {
		p, copied := openPlan("g", "a", "b", PurifyNone), *d
		c.change(&p, &copied)
		if _, err := Run(t.Context(), p, &copied, Options{}); !errors.Is(err, ErrInput) || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
}

// "each" stands for every declared label but the reference; a crossing joins labels.
func TestComparisonsAreWrittenOut(t *testing.T) {
	t.Parallel()
	d := mixedData(2, 600, 9)
	h := Grouping{Name: "h", Labels: []string{"x", "y"}}
	for c := range d.Candidates() {
		h.Codes = append(h.Codes, uint16(c%3)) // a third not stated
	}
	d.Groupings = append(d.Groupings, h)
	names := func(p Plan) string {
		var s []string
		for _, c := range mustRun(t, p, d).Comparisons {
			s = append(s, c.Grouping+" "+c.Reference+"/"+c.Focal)
		}
		return strings.Join(s, ", ")
	}
	if got := names(openPlan("g", "b", FocalEach, PurifyNone)); got != "g b/a, g b/c" {
		t.Errorf("each: %s", got)
	}
	declared := openPlan("g", "b", FocalEach, PurifyNone)
	declared.Groupings["g"] = GroupingRule{Labels: []string{"c", "b"}}
	if got := names(declared); got != "g b/c" {
		t.Errorf("each with declared labels: %s", got)
	}
	if got := names(openPlan("h+g", "x+b", FocalEach, PurifyNone)); got != "h+g x+b/x+a, h+g x+b/x+c, h+g x+b/y+a, h+g x+b/y+b, h+g x+b/y+c" {
		t.Errorf("crossing: %s", got)
	}
	c := mustRun(t, openPlan("h+g", "x+a", "y+b", PurifyNone), d).Comparisons[0]
	n := [3]int{}
	for i := range d.Candidates() {
		g, hh := d.Groupings[0].Codes[i], h.Codes[i]
		switch {
		case g == 0 || hh == 0:
			n[2]++
		case g == 1 && hh == 1:
			n[0]++
		case g == 2 && hh == 2:
			n[1]++
		}
	}
	e := mustRun(t, openPlan("h+g", "x+a", "y+b", PurifyNone), d)
	if counted := e.Inputs.Groupings[0]; counted.Labels[0] != (LabelCount{"x+a", n[0]}) || counted.NotStated != n[2] {
		t.Errorf("labels of the crossing %+v, want x+a %d, not stated %d", counted, n[0], n[2])
	}
	if got := [3]int{c.Groups.Reference.N, c.Groups.Focal.N, c.Groups.NotStated}; got != n {
		t.Errorf("crossing counts %v, want %v", got, n)
	}
}

// Only the methods asked for stand in a finding, in report order; without the method that
// gives the letter there is none.
func TestMethodsAskedFor(t *testing.T) {
	t.Parallel()
	p := openPlan("gender", "F", "M", PurifyTwoStage)
	p.Methods = []string{"standardization", "breslow_day"}
	e := mustRun(t, p, verbalBinary(t))
	if got := strings.Join(e.Plan.Methods, " "); got != "breslow_day standardization" {
		t.Errorf("methods %q", got)
	}
	for _, f := range e.Comparisons[0].Items {
		if len(f.Results) != 2 || f.MantelHaenszel() != nil || f.Standardization() == nil {
			t.Fatalf("%s: %d results", f.Item, len(f.Results))
		}
		k := f.Classification
		if k.Class != nil || deref(k.Reason) != ReasonNotEstimable || deref(k.Detail) != DetailNoClassifyingMethod {
			t.Errorf("%s: %+v", f.Item, k)
		}
	}
	if d := e.Disagreements(); len(d) > 0 {
		t.Errorf("disagreements: %v", d)
	}
	p.Methods = []string{"all"}
	if got := len(mustRun(t, p, verbalBinary(t)).Plan.Methods); got != len(Methods()) {
		t.Errorf("all: %d methods", got)
	}
}

// Every method has an entry in the package documentation and decodes what it encodes.
func TestMethodsAreDocumented(t *testing.T) {
	t.Parallel()
	seen := map[string]bool{}
	for _, m := range Methods() {
		if seen[m.ID()] {
			t.Errorf("%s stands twice", m.ID())
		}
		seen[m.ID()] = true
		if !strings.Contains(packageDocumentation(t), "\n// "+m.ID()+": ") {
			t.Errorf("%s has no entry in doc.go", m.ID())
		}
		if len(m.New().Columns()) == 0 {
			t.Errorf("%s has no columns", m.ID())
		}
	}
	for _, id := range plannedMethods {
		if seen[id] {
			t.Errorf("%s is built and planned", id)
		}
	}
}

// The continuity correction decides when the policy says so.
func TestContinuityCorrectionAsPolicy(t *testing.T) {
	t.Parallel()
	p := openPlan("gender", "F", "M", PurifyTwoStage)
	p.Criteria.ContinuityCorrection = true
	e := mustRun(t, p, verbalBinary(t))
	for _, f := range e.Comparisons[0].Items {
		k, mh := f.Classification, f.MantelHaenszel()
		if *k.PValue != *mh.PValueCorrected || deref(k.Class) != deref(k.ClassIfCorrected) {
			t.Errorf("%s: %+v", f.Item, k)
		}
	}
	if d := e.Disagreements(); len(d) > 0 {
		t.Errorf("disagreements: %v", d)
	}
}
