package main

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"difaudit/dif"
)

// A small certification: 250 reference and 50 focal candidates, 120 items answered by
// letters, local minima of 100 and 300. Nobody gets a letter, and everything is counted.
func TestSmallCertification(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	difaudit(t, "", "simulate", "--out", dir, "--model", "2pl", "--candidates", "250:50", "--items", "120", "--raw", "--impact", "-0.5", "--dif", "5,50:-2", "--seed", "4").
		want(t, statusDone)
	out, table := filepath.Join(dir, "evidence.json"), filepath.Join(dir, "findings.csv")
	r := difaudit(t, "", "audit", "--responses", filepath.Join(dir, "responses.csv"), "--items", filepath.Join(dir, "items.csv"),
		"--comparison", "group:reference:focal", "--min-smaller-group", "100", "--min-total", "300", "--evidence", out, "--csv", table)
	r.want(t, statusDone, "no verdict 120", "too few candidates")
	if !strings.HasPrefix(r.stdout, "Candidates lost:") {
		t.Errorf("the share of candidates lost is not said first: %.100q", r.stdout)
	}
	for _, word := range []string{"no DIF", "NaN", "Inf", "passed", "biased"} {
		if strings.Contains(r.stdout, word) {
			t.Errorf("the table says %q", word)
		}
	}
	c := readEvidence(t, out).Comparisons[0]
	if c.Summary.NoVerdict.Of(dif.ReasonTooFewCandidates) != 120 || c.Summary.Classes.Total() != 0 {
		t.Errorf("summary %+v", c.Summary)
	}
	var se, n float64
	for _, f := range c.Items {
		mh := f.MantelHaenszel()
		if f.Classification.Class != nil || f.Standardization() == nil {
			t.Errorf("%s: class %v", f.Item, f.Classification.Class)
		}
		if mh.DeltaSE != nil {
			se += *mh.DeltaSE
			n++
		}
	}
	// The mean standard error of such an audit is about 1.1 (simulation in the literature on
	// small groups gives the same size; here a wide band that a wrong formula would leave).
	if mean := se / n; !(math.Abs(mean-1.1) < 0.3) {
		t.Errorf("mean standard error %.2f of %v items", mean, n)
	}
	if got := c.Summary.ExpectedByChance.Significant; !(math.Abs(got-6) < 0.5) {
		t.Errorf("%.2f items expected below .05 by chance, want about 6", got)
	}
	lost := false
	for _, w := range c.Warnings {
		lost = lost || w.Code == dif.WarnCandidatesLost
	}
	if !lost {
		t.Errorf("no warning about lost candidates: %v", c.Warnings)
	}
	b, err := os.ReadFile(table)
	if err != nil {
		t.Fatal(err)
	}
	if got := strings.Count(string(b), dif.ReasonTooFewCandidates); got != 120 {
		t.Errorf("the CSV counts %d items without verdict, want 120", got)
	}
}

// What was planted is found: large differences get their letter and sign, and the
// other items stay A but for a few.
func TestPlantedDifferencesAreFound(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	difaudit(t, "", "simulate", "--out", dir, "--model", "rasch", "--candidates", "4000:2000", "--items", "40", "--impact", "-0.5",
		"--dif", "7:-2.5", "--dif", "20:2.5", "--pretest", "5", "--seed", "9").want(t, statusDone)
	out := filepath.Join(dir, "evidence.json")
	difaudit(t, "", "audit", "--responses", filepath.Join(dir, "responses.csv"), "--items", filepath.Join(dir, "items.csv"),
		"--comparison", "group:reference:focal", "--evidence", out).want(t, statusDone)
	e := readEvidence(t, out)
	c := e.Comparisons[0]
	for i, f := range c.Items {
		want := dif.ClassA
		switch i {
		case 6:
			want = dif.ClassCMinus
		case 19:
			want = dif.ClassCPlus
		}
		if f.Classification.Class == nil || *f.Classification.Class != want {
			t.Errorf("%s (%s): class %v, want %s", f.Item, e.Inputs.Items[i].Role, f.Classification.Class, want)
		}
	}
	if got := strings.Join(c.Matching.RemovedItems, " "); got != c.Items[6].Item+" "+c.Items[19].Item {
		t.Errorf("removed %q", got)
	}
}
