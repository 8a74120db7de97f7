package reports

import (
	"bytes"
	"strings"
	"testing"

	"difaudit/dif"
)

// Values of CV-22 in methods.md, computed there by other means on the same data, rounded for print.
func TestTableOfFindings(t *testing.T) {
	t.Parallel()
	var b bytes.Buffer
	if err := WriteTable(&b, verbal(t, func(p *dif.Plan) { p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 50, 200 })); err != nil {
		t.Fatal(err)
	}
	s := b.String()
	for _, want := range []string{
		"gender: M (focal, 73) against F (reference, 243)",
		"C- 0, C+ 1, B- 3, B+ 3, A 17", "no verdict 0",
		"By chance alone",
	} {
		if !strings.Contains(s, want) {
			t.Errorf("%q is missing in\n%s", want, s)
		}
	}
	for item, want := range map[string][]string{
		"S2WantShout": {"243", "73", "-2.26", "0.78", "B-"},
		"S3DoCurse":   {"243", "73", "2.32", "0.78", "9.34", "C+"},
	} {
		line := ""
		for _, l := range strings.Split(s, "\n") {
			if strings.HasPrefix(strings.TrimSpace(l), item) {
				line = l
			}
		}
		fields := strings.Fields(line)
		for _, w := range want {
			found := false
			for _, f := range fields {
				found = found || f == w
			}
			if !found {
				t.Errorf("%s: %q is missing in %q", item, w, line)
			}
		}
	}
}

func TestTableMarksProvisionalLetters(t *testing.T) {
	t.Parallel()
	var b bytes.Buffer
	if err := WriteTable(&b, verbal(t, nil)); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"(C+) too few candidates", "(A) too few candidates", "no verdict 24: too few candidates (24)"} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("%q is missing in\n%s", want, b.String())
		}
	}
}

func TestTableLinesUpWideAndDangerousNames(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	e.Comparisons[0].Items[0].Item = "日本語"
	e.Comparisons[0].Items[1].Item = "\x1b[31mred\u202e"
	e.Comparisons[0].Items[2].Item = strings.Repeat("long", 80)
	var b bytes.Buffer
	if err := WriteTable(&b, e); err != nil {
		t.Fatal(err)
	}
	if strings.ContainsAny(b.String(), "\x1b\u202e") {
		t.Error("control characters reach the terminal")
	}
	at := -1
	for _, line := range strings.Split(b.String(), "\n") {
		if i := strings.Index(line, "  243 "); i >= 0 {
			if w := displayWidth(line[:i]); at >= 0 && w != at {
				t.Errorf("column begins at %d instead of %d: %q", w, at, line)
			} else {
				at = w
			}
		}
	}
	if at < 0 {
		t.Error("no line of findings")
	}
}

// Sentences are wrapped, and the lines of items are as narrow as names and values allow.
func TestTableKeepsToAHundredColumns(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	c := &e.Comparisons[0]
	c.Warnings = append(c.Warnings, dif.Warning{Code: "x", Message: strings.Repeat("A long sentence of a warning. ", 12)})
	c.Items[0].Item = strings.Repeat("long-name-", 5)
	lines := strings.Split(table(t, e), "\n")
	names := 0
	for i, line := range lines {
		if w := displayWidth(line); w > 100 && !strings.HasPrefix(line, "Candidates lost") {
			t.Errorf("%d columns: %q", w, line)
		}
		if strings.Contains(line, "long-name") && strings.Contains(line, "…") {
			names++
		}
		if i > 0 && strings.TrimRight(line, " ") != line {
			t.Errorf("%q ends in spaces", line)
		}
	}
	if names != 1 {
		t.Error("the long name is not shortened")
	}
}
