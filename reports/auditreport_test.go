package reports

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"strings"
	"testing"

	"difaudit/dif"
)

func pdf(t testing.TB, e *dif.Evidence) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := WritePDF(&b, e, reportOptions); err != nil {
		t.Fatal(err)
	}
	if !bytes.HasPrefix(b.Bytes(), []byte("%PDF-")) || !bytes.HasSuffix(bytes.TrimSpace(b.Bytes()), []byte("%%EOF")) {
		t.Fatal("not a whole PDF")
	}
	return b.Bytes()
}

func TestReportIsDeterministic(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	first := pdf(t, e)
	for range 3 {
		if !bytes.Equal(first, pdf(t, e)) {
			t.Fatal("equal evidence gave different bytes")
		}
	}
	if n := bytes.Count(first, []byte("(D:20260304000000)")); n != 2 {
		t.Errorf("the report date stands %d times in the document information, want creation and change", n)
	}
	later := reportOptions
	later.Date = later.Date.AddDate(0, 0, 1)
	var b bytes.Buffer
	if err := WritePDF(&b, e, later); err != nil {
		t.Fatal(err)
	}
	if bytes.Equal(first, b.Bytes()) {
		t.Error("the date does not reach the report")
	}
}

// A report made from decoded evidence equals the one made from the evidence itself.
func TestReportFromStoredEvidence(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	stored, err := e.Encode()
	if err != nil {
		t.Fatal(err)
	}
	read, err := dif.DecodeEvidence(stored)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(pdf(t, e), pdf(t, read)) {
		t.Error("the report differs after storing and reading the evidence")
	}
}

// names are texts that a PDF writer may trip over.
var names = []string{
	"😀 emoji", "שאלה", "سؤال", "bad \xff\xc3", strings.Repeat("very-long-identifier_", 15), strings.Repeat("x", 300), strings.Repeat("Ж", 5000),
	"", " ", "\x00", "\u202e", "(a)\\)", "{nb}", "%PDF", "=1+1", "a\nb", "\uffff", "Đề thi số một", "Σ∫√≤",
}

func TestReportSurvivesAnyText(t *testing.T) {
	t.Parallel()
	for _, name := range names {
		e := verbal(t, nil)
		e.Plan.Title, e.Plan.Criteria.Name = name, name
		e.Inputs.Warnings = []dif.Warning{{Code: name, Message: name}, {Code: name}}
		e.Inputs.Exclusions = []dif.Exclusion{{Reason: name, Count: 12}, {Reason: name, Grouping: &name, Label: &name, Count: 12}}
		e.Inputs.Sources[0].Form, e.Inputs.Sources[0].Administration = &name, &name
		c := &e.Comparisons[0]
		c.Grouping, c.Reference, c.Focal = name, name, name+"2"
		c.Warnings = []dif.Warning{{Code: name, Message: name}}
		for i := range c.Items {
			c.Items[i].Item = fmt.Sprint(name, i)
			c.Items[i].Version = name
			c.Items[i].Classification.Detail = &name
			c.Items[i].Warnings = append(c.Items[i].Warnings, dif.Warning{Code: name, Message: name})
		}
		c.Items[3].Classification.Reason = &name
		pdf(t, e)
		var b bytes.Buffer
		if err := errors.Join(WriteCSV(&b, e), WriteTable(&b, e)); err != nil {
			t.Errorf("%q: %v", name, err)
		}
	}
}

func TestReportSizes(t *testing.T) {
	t.Parallel()
	p := planFor("sex", "f", "m")
	groups := map[string]int{"f": 60, "m": 40}
	for _, n := range []int{1, 2, 45, 46, 1000} {
		pdf(t, audit(t, p, invented{numbered("Q", n), "sex", groups, nil, 0.3}.draw(uint64(n))))
	}
	none := audit(t, p, invented{numbered("Q", 3), "sex", groups, nil, 0}.draw(1))
	none.Comparisons[0].Items = nil
	none.Comparisons[0].Summary = dif.Summary{}
	pdf(t, none)
	none.Comparisons = nil
	none.Inputs = dif.Inputs{}
	none.Plan = dif.Plan{}
	pdf(t, none)
	pdf(t, &dif.Evidence{})
	var b bytes.Buffer
	if err := errors.Join(WriteCSV(&b, &dif.Evidence{}), WriteTable(&b, &dif.Evidence{})); err != nil {
		t.Error(err)
	}
}

func TestReportOfManyComparisons(t *testing.T) {
	t.Parallel()
	sizes := map[string]int{"a": 120, "zz": 4, "": 30}
	for i := range 30 {
		sizes[fmt.Sprintf("g%02d", i)] = 60
	}
	pdf(t, audit(t, planFor("country", "a", dif.FocalEach), invented{numbered("Q", 5), "country", sizes, nil, 0}.draw(3)))
}

// Every combination of methods must do, also none that gives a letter.
func TestReportWithoutAMethod(t *testing.T) {
	t.Parallel()
	for _, methods := range [][]string{{"mantel_haenszel"}, {"standardization"}, {"breslow_day"}, {"breslow_day", "standardization"}} {
		e := verbal(t, func(p *dif.Plan) { p.Methods = methods })
		pdf(t, e)
		var b bytes.Buffer
		if err := errors.Join(WriteCSV(&b, e), WriteTable(&b, e)); err != nil {
			t.Error(err)
		}
	}
}

func TestReportWithContinuityCorrection(t *testing.T) {
	t.Parallel()
	e := verbal(t, func(p *dif.Plan) { p.Criteria.ContinuityCorrection = true; p.Matching.Purification = dif.PurifyNone })
	pdf(t, e)
}

func TestReportNeedsEvidenceAndDate(t *testing.T) {
	t.Parallel()
	if err := WritePDF(io.Discard, nil, reportOptions); err == nil {
		t.Error("no evidence: no error")
	}
	if err := WritePDF(io.Discard, &dif.Evidence{}, Options{}); err == nil {
		t.Error("no date: no error")
	}
	if err := errors.Join(WriteCSV(io.Discard, nil)); err == nil {
		t.Error("CSV without evidence: no error")
	}
	if err := errors.Join(WriteTable(io.Discard, nil)); err == nil {
		t.Error("table without evidence: no error")
	}
}

// Every flagged item is pictured, provisional letters included, in item order.
func TestEveryFlaggedItemIsPictured(t *testing.T) {
	t.Parallel()
	var c exposedComparison
	for i := range 180 {
		letter := []string{"A", "B-", "C+"}[i%3]
		f := exposedFinding{number: i + 1}
		if i%2 == 0 {
			f.Classification.Class = &letter
		} else {
			f.Classification.ComputedClass = &letter
		}
		c.findings = append(c.findings, f)
	}
	got := c.flaggedItems()
	if len(got) != 120 {
		t.Fatalf("%d pictured, want 120", len(got))
	}
	for i, f := range got[1:] {
		if f.number <= got[i].number {
			t.Error("pictures are out of item order")
		}
	}
}

// Every reason and every code of a warning has words of its own.
func TestEverythingIsWorded(t *testing.T) {
	t.Parallel()
	for _, reason := range dif.Reasons() {
		if reasonShort[reason] == "" || reasonSentence(reason, dif.Criteria{}) == spoken(reason)+"." {
			t.Errorf("reason %s has no words", reason)
		}
	}
	for _, code := range []string{
		dif.WarnDirectionWithoutLimit, dif.WarnLargeNotExcluded, dif.WarnNonUniform, dif.WarnBreslowDaySparse, dif.WarnFocalUnmatched,
		dif.WarnLetterDependsOnTest, dif.WarnVeryEasy, dif.WarnLowItemRest, dif.WarnNegativeItemRest,
	} {
		if warningSentences[code] == "" {
			t.Errorf("warning %s has no words", code)
		}
	}
	for _, code := range []string{
		dif.WarnCandidatesLost, dif.WarnFocalLost, dif.WarnLowReliability, dif.WarnLargeGroupDifference, dif.WarnPurificationRefused,
		dif.WarnNotStated, dif.WarnSetsPooled, dif.WarnUnscoredItems,
	} {
		if comparisonWarnings[code] == "" {
			t.Errorf("warning %s has no words", code)
		}
	}
	for _, m := range dif.Methods() {
		found := false
		for _, w := range methodsInWords {
			found = found || w.id == m.ID()
		}
		if !found {
			t.Errorf("method %s is not explained", m.ID())
		}
	}
}
