//go:build rendered

package reports

import (
	"bytes"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"

	"difaudit/dif"
	"github.com/go-fonts/dejavu/dejavusans"
	"github.com/go-fonts/dejavu/dejavusansbold"
)

// These tests read reports as a reader's programs do, through pdftotext and pdftoppm
// of poppler-utils and fc-query of fontconfig.

func save(t *testing.T, b []byte) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "report.pdf")
	if err := os.WriteFile(path, b, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func command(t *testing.T, name string, args ...string) string {
	t.Helper()
	out, err := exec.Command(name, args...).Output()
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return string(out)
}

// oneLine returns the text with every run of white space as a space.
func oneLine(s string) string { return strings.Join(strings.Fields(s), " ") }

func reportText(t *testing.T, e *dif.Evidence) string {
	t.Helper()
	return oneLine(command(t, "pdftotext", save(t, pdf(t, e)), "-"))
}

var (
	casesOnce sync.Once
	casesMade map[string]*dif.Evidence
)

// cases returns the evidence of the reports whose pages are looked at, made once.
func cases(t *testing.T) map[string]*dif.Evidence {
	casesOnce.Do(func() { casesMade = makeCases(t) })
	return casesMade
}

func makeCases(t *testing.T) map[string]*dif.Evidence {
	three := planFor("language", "1-home", "2-other")
	three.Comparisons = append(three.Comparisons,
		dif.PlannedComparison{Grouping: "language", Reference: "1-home", Focal: "3-third"},
		dif.PlannedComparison{Grouping: "language", Reference: "1-home", Focal: "4-few"})
	odd := verbal(t, nil)
	odd.Plan.Title = "Ελληνική εξέταση, Экзамен, Kỳ thi: a title that needs more than two lines of the first page to be told in full, and then some"
	for i, name := range names {
		if i < 24 {
			odd.Comparisons[0].Items[i].Item = shortenRunes(name, 300)
			odd.Inputs.Items[i].Item = shortenRunes(name, 300)
		}
	}
	sizes := map[string]int{"a": 150, "": 20}
	for i := range 30 {
		sizes[fmt.Sprintf("group-%02d", i)] = 60
	}
	sets := verbal(t, nil)
	for i := range 5 {
		sets.Comparisons[0].Matching.Sets = append(sets.Comparisons[0].Matching.Sets,
			dif.PresentedSet{Set: i + 1, Form: ptr("form " + strconv.Itoa(i)), Items: 20, NReference: 45 + i, NFocal: 5 + 4*i})
	}
	return map[string]*dif.Evidence{
		"verbal":    verbal(t, func(p *dif.Plan) { p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 50, 200 }),
		"noverdict": audit(t, planFor("sex", "f", "m"), invented{numbered("Q", 120), "sex", map[string]int{"f": 250, "m": 50, "": 3}, map[int]float64{10: 0.9, 60: 0.9, 90: -0.9}, 0.5}.draw(1)),
		"three":     audit(t, three, invented{numbered("CHEM-", 60), "language", map[string]int{"1-home": 4000, "2-other": 1500, "3-third": 600, "4-few": 7, "": 212}, map[int]float64{10: 0.9, 30: 0.6, 50: -0.9}, 0.5}.draw(2)),
		"odd":       odd,
		"many":      audit(t, planFor("country", "a", dif.FocalEach), invented{numbered("L", 4), "country", sizes, nil, 0}.draw(4)),
		"sets":      sets,
		"one":       audit(t, planFor("sex", "f", "m"), invented{numbered("Q", 1), "sex", map[string]int{"f": 30, "m": 20}, nil, 0}.draw(5)),
	}
}

func TestWordsAndNumbersOfTheReport(t *testing.T) {
	t.Parallel()
	e := cases(t)["verbal"]
	text := reportText(t, e)
	for _, want := range []string{
		"Verbal aggression, want and do", "2026-03-04", e.Inputs.DataSHA256, reportDigest, "difaudit " + dif.EngineVersion,
		"What was asked", "What was found", "What this report lets you say", "What it does not let you say", "Contents",
		"Who was counted", "Records received 316", "Records analysed 316",
		"How the items were compared", "Mantel & Haenszel 1959", "Holland & Thayer 1988", "Robins, Breslow & Greenland (1986)", "Breslow & Day 1980",
		"Tarone 1985", "Dorans & Kulick 1986", "Zwick & Thayer", "Dorans & Holland 1993", "Zieky 1993", "Zwick 2012", "Paek 2010", "Benjamini & Hochberg",
		"The programme's policy", "Matching and scoring", "Comparison 1: gender, M against F", "By chance alone",
		"D-DIF of all items, with 95 % intervals", "harder for the focal group", "easier for the focal group", "Flagged items", "All items", "Further statistics",
		"What was not tested", "Cautions", "How to check this report", "difaudit verify EVIDENCE", "page 1 of",
		"S2WantShout, S2DoCurse",            // the items that leave the matching score (CV-22 of methods.md, pass 1)
		"-2.26", "2.32", "9.34", "B-", "B+", // of CV-22, rounded
		"S3DoCurse (C+)", "S2WantCurse (B-, corrected A)", // CV-22: chi-square 3.84883 is below .05 only without correction
		"0.88", // coefficient alpha .876121, CV-40
	} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing", want)
		}
	}
	for _, item := range e.Inputs.Items {
		if strings.Count(text, item.Item) < 3 {
			t.Errorf("%s is missing in a table or plot", item.Item)
		}
	}
}

func TestCountsAgreeWithTheirWords(t *testing.T) {
	t.Parallel()
	for name, e := range cases(t) {
		if text := command(t, "pdftotext", "-raw", save(t, pdf(t, e)), "-"); badCount.MatchString(text) {
			t.Errorf("%s: the report says %q", name, badCount.FindAllString(text, -1))
		}
		var b bytes.Buffer
		if err := WriteTable(&b, e); err != nil {
			t.Fatal(err)
		}
		if badCount.MatchString(b.String()) {
			t.Errorf("%s: the table says %q", name, badCount.FindAllString(b.String(), -1))
		}
	}
}

func TestLabelsNotComparedAreCountedAndNamed(t *testing.T) {
	t.Parallel()
	sizes := map[string]int{"a": 300, "b": 150, "c": 40, "d": 25, "": 30}
	e := audit(t, planFor("group", "a", "b"), invented{numbered("Q", 12), "group", sizes, nil, 0}.draw(13))
	text := oneLine(command(t, "pdftotext", "-layout", save(t, pdf(t, e)), "-"))
	for _, want := range []string{
		"group a reference 300 b focal 150 other labels, not compared 65 not stated 30 all analysed 545", "Labels of group that stand in no comparison: c, d.",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing", want)
		}
	}
}

func TestMethodsOfExternalMatching(t *testing.T) {
	t.Parallel()
	text := reportText(t, external(t))
	for _, want := range []string{"One stage: no item is part of the external score", "An external score supplied with the data", "It correlates"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing", want)
		}
	}
	if strings.Contains(text, "Two stages") {
		t.Error("the report speaks of two stages")
	}
}

// Words that a report must not use, whatever it found.
func TestReportJudgesNobody(t *testing.T) {
	t.Parallel()
	for name, e := range cases(t) {
		text := " " + strings.ToLower(reportText(t, e)) + " "
		for _, word := range []string{"biased", "unbiased", "unfair", " fair ", "no dif found", "none or small", "none or a small", "passed", "failed", "guilty", "nan", "infinity", "+inf", "%!"} {
			if word == "nan" {
				if slices.Contains(strings.Fields(text), "nan") {
					t.Errorf("%s: the report says %q", name, word)
				}
				continue
			}
			if strings.Contains(text, word) {
				t.Errorf("%s: the report says %q", name, word)
			}
		}
	}
}

func TestReportWithholds(t *testing.T) {
	t.Parallel()
	all := cases(t)
	three := oneLine(command(t, "pdftotext", "-layout", save(t, pdf(t, all["three"])), "-"))
	for _, want := range []string{"fewer than 10", "4-few (focal) fewer than 10 withheld", "not stated withheld", "all analysed 6,319", "No statistic of this comparison is shown"} {
		if !strings.Contains(three, want) {
			t.Errorf("%q is missing", want)
		}
	}
	sets := reportText(t, all["sets"])
	if !strings.Contains(sets, "form 0 20 45 fewer than 10") || !strings.Contains(sets, "form 1 20 46 fewer than 10") || !strings.Contains(sets, "form 4 20 49 21") {
		t.Error("presented sets are not guarded")
	}
	small := reportText(t, smallGroup(t))
	if strings.Contains(small, "D-DIF of all items") || strings.Contains(small, "Further statistics") || !strings.Contains(small, "withheld for privacy") {
		t.Error("a group of eight is shown in detail")
	}
}

func TestReportSaysWhatItReplaced(t *testing.T) {
	t.Parallel()
	text := reportText(t, cases(t)["odd"])
	for _, want := range []string{"□ emoji", "characters that the fonts of this report cannot print", "Đề thi số một", "Σ∫√≤", "Ελληνική εξέταση, Экзамен, Kỳ thi"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing", want)
		}
	}
	if strings.Contains(reportText(t, verbal(t, nil)), "cannot print") {
		t.Error("the report of plain names speaks of replaced characters")
	}
}

// The characters taken as printable are those fontconfig finds in the font files.
func TestCoverageAgreesWithFontconfig(t *testing.T) {
	t.Parallel()
	for name, font := range map[string][]byte{"regular": dejavusans.TTF, "bold": dejavusansbold.TTF} {
		path := filepath.Join(t.TempDir(), "font.ttf")
		if err := os.WriteFile(path, font, 0o600); err != nil {
			t.Fatal(err)
		}
		want := &coverage{}
		for _, span := range strings.Fields(command(t, "fc-query", "--format", "%{charset}", path)) {
			from, to, ok := strings.Cut(span, "-")
			if !ok {
				to = from
			}
			a, errA := strconv.ParseUint(from, 16, 32)
			b, errB := strconv.ParseUint(to, 16, 32)
			if errA != nil || errB != nil {
				t.Fatal(span, errA, errB)
			}
			for c := a; c <= b && c <= 0xFFFF; c++ {
				want[c>>6] |= 1 << (c & 63)
			}
		}
		got := glyphs(font)
		differ := 0
		for c := rune(0); c < 0xFFFF; c++ {
			if got.has(c) != want.has(c) {
				differ++
				if differ <= 5 {
					t.Errorf("%s: %U covered %v, fontconfig says %v", name, c, got.has(c), want.has(c))
				}
			}
		}
		t.Logf("%s: %d differ", name, differ)
	}
}

// Bookmarks lead to every section and comparison, and the document carries its title.
func TestDocumentInformation(t *testing.T) {
	t.Parallel()
	path := save(t, pdf(t, cases(t)["odd"]))
	info := command(t, "pdfinfo", path)
	for _, want := range []string{"Ελληνική εξέταση", "A4", "PDF version"} {
		if !strings.Contains(info, want) {
			t.Errorf("%q is missing in\n%s", want, info)
		}
	}
	outline := command(t, "pdftohtml", "-xml", "-i", "-stdout", path)
	for _, want := range []string{titleCounted, titleMethods, "Comparison 1", titleLimits} {
		i := strings.Index(outline, "<outline>")
		if i < 0 || !strings.Contains(outline[i:], want) {
			t.Errorf("no bookmark %q", want)
		}
	}
}
