package main

import (
	"bytes"
	"context"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"difaudit/dif"
)

const (
	verbalBinary     = "../../testdata/verbal-aggression/verbal-binary.csv"
	verbalPolytomous = "../../testdata/verbal-aggression/verbal-polytomous.csv"
	healthSurvey     = "../../testdata/nz-health-survey/nz-worry.csv"
)

// ran is the outcome of one command line.
type ran struct {
	status         int
	stdout, stderr string
}

// difaudit runs one command line with the given standard input and a fixed clock.
func difaudit(t *testing.T, stdin string, args ...string) ran {
	t.Helper()
	var stdout, stderr bytes.Buffer
	status := run(t.Context(), args, environment{
		getenv: func(string) string { return "" },
		stdin:  strings.NewReader(stdin), stdout: &stdout, stderr: &stderr,
		now: func() time.Time { return time.Date(2030, 5, 6, 7, 8, 9, 0, time.UTC) },
	})
	return ran{status, stdout.String(), stderr.String()}
}

func (r ran) want(t *testing.T, status int, words ...string) {
	t.Helper()
	if r.status != status {
		t.Errorf("status %d, want %d\nstdout: %s\nstderr: %s", r.status, status, r.stdout, r.stderr)
	}
	for _, w := range words {
		if !strings.Contains(r.stdout+r.stderr, w) {
			t.Errorf("%q is not in the output\nstdout: %s\nstderr: %s", w, r.stdout, r.stderr)
		}
	}
}

func readEvidence(t *testing.T, path string) *dif.Evidence {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	e, err := dif.DecodeEvidence(b)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// CV-09, CV-20 and CV-22 through the command line, to half a unit of the last printed place.
func TestAuditReproducesPublishedValues(t *testing.T) {
	t.Parallel()
	out := filepath.Join(t.TempDir(), "evidence.json")
	base := []string{"audit", "--responses", verbalBinary, "--comparison", "gender:F:M", "--min-smaller-group", "0", "--min-total", "0", "--evidence", out}
	r := difaudit(t, "", append(base, "--purification", "none")...)
	r.want(t, statusDone, "S2WantShout", "C-")
	item := map[string]*dif.Finding{}
	e := readEvidence(t, out)
	for i := range e.Comparisons[0].Items {
		item[e.Comparisons[0].Items[i].Item] = &e.Comparisons[0].Items[i]
	}
	near := func(what string, got *float64, want, half float64) {
		t.Helper()
		if got == nil || !(math.Abs(*got-want) <= half) {
			t.Errorf("%s = %v, want %v", what, got, want)
		}
	}
	mh := item["S2WantShout"].MantelHaenszel()
	near("chi-square", mh.ChiSquare, 10.60343, 5e-6)
	near("corrected", mh.ChiSquareCorrected, 9.60321, 5e-6)
	near("alpha", mh.OddsRatio, 2.88038, 5e-6)
	near("D-DIF", mh.Delta, -2.48612, 5e-6)
	near("SE", mh.DeltaSE, 0.79244, 5e-6)
	near("q", mh.QValue, .027091, 5e-7)
	near("trend", item["S2WantShout"].BreslowDay().Trend.Statistic, 0.8908, 5e-5)
	near("P-DIF", item["S2WantShout"].Standardization().PDif, -0.17592, 5e-6)
	near("q of S3DoCurse", item["S3DoCurse"].MantelHaenszel().QValue, .063004, 5e-7)

	difaudit(t, "", append(base, "--purification", "two_stage")...).want(t, statusDone)
	e = readEvidence(t, out)
	if got := strings.Join(e.Comparisons[0].Matching.RemovedItems, " "); got != "S2WantShout S2DoCurse" {
		t.Errorf("removed %q", got)
	}
	near("S3DoCurse in pass 2", e.Comparisons[0].Items[18].MantelHaenszel().Delta, 2.31767, 5e-6)
	if c := e.Comparisons[0].Items[18].Classification.Class; c == nil || *c != dif.ClassCPlus {
		t.Errorf("S3DoCurse in pass 2: class %v, want C+", c)
	}
}

// The same files and plan give the same bytes, however many workers; the report and the
// CSV too.
func TestOutputsAreReproducible(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	var want [][]byte
	for _, workers := range []string{"1", "2", "3"} {
		names := []string{"e" + workers, "r" + workers, "c" + workers}
		for i := range names {
			names[i] = filepath.Join(dir, names[i])
		}
		difaudit(t, "", "audit", "--responses", healthSurvey, "--comparison", "sex:F:M", "--comparison", "ethnicity:European:Maori",
			"--ignore", "age_band", "--empty", "not_presented", "--workers", workers, "--report-date", "2030-01-02",
			"--evidence", names[0], "--report", names[1], "--csv", names[2]).want(t, statusDone)
		var got [][]byte
		for _, n := range names {
			b, err := os.ReadFile(n)
			if err != nil {
				t.Fatal(err)
			}
			got = append(got, b)
		}
		if want == nil {
			want = got
		}
		for i := range got {
			if !bytes.Equal(got[i], want[i]) {
				t.Errorf("%s differs with %s workers", filepath.Base(names[i]), workers)
			}
		}
	}
	left, err := os.ReadDir(dir)
	if err != nil || len(left) != 9 {
		t.Errorf("%d files are left, want 9 (%v)", len(left), err)
	}
}

func TestAuditRefusesBadUsage(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	plan := filepath.Join(dir, "plan.yaml")
	if err := os.WriteFile(plan, []byte("title: x\ncomparisons:\n  - {grouping: gender, reference: F, focal: M}\nmatching:\n  levels: thick\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	for name, c := range map[string]struct {
		args  []string
		words []string
	}{
		"no responses":    {nil, []string{"--responses is required"}},
		"no comparison":   {[]string{"--responses", verbalBinary}, []string{"comparisons"}},
		"thick":           {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--levels", "thick"}, []string{"thick", "not part of this version"}},
		"thick in a plan": {[]string{"--responses", verbalBinary, "--plan", plan}, []string{"thick", "not part of this version"}},
		"iterative":       {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--purification", "iterative"}, []string{"iterative", "not part of this version"}},
		"later method":    {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--methods", "logistic"}, []string{"logistic", "not part of this version"}},
		"unknown method":  {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--methods", "magic"}, []string{"magic", "mantel_haenszel"}},
		"model":           {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--model", "2pl"}, []string{"--model", "not part of this version"}},
		"comparison":      {[]string{"--responses", verbalBinary, "--comparison", "gender:F"}, []string{"GROUPING:REFERENCE:FOCAL"}},
		"label":           {[]string{"--responses", verbalBinary, "--comparison", "gender:F:X"}, []string{"label"}},
		"grouping":        {[]string{"--responses", verbalBinary, "--comparison", "sex:F:M"}, []string{"sex"}},
		"no file":         {[]string{"--responses", filepath.Join(dir, "none.csv"), "--comparison", "gender:F:M"}, []string{"none.csv"}},
		"folder":          {[]string{"--responses", dir, "--comparison", "gender:F:M"}, []string{"folder"}},
		"unknown option":  {[]string{"--responses", verbalBinary, "--no-such"}, []string{"no-such"}},
		"output in no folder": {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--evidence", filepath.Join(dir, "no", "e.json")},
			[]string{"--evidence", "does not exist"}},
		"same output":  {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--evidence", "-", "--csv", "-"}, []string{"same output"}},
		"over input":   {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--csv", verbalBinary}, []string{"overwrite"}},
		"option twice": {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--responses=" + verbalPolytomous}, []string{"--responses is given twice"}},
		"date":         {[]string{"--responses", verbalBinary, "--comparison", "gender:F:M", "--report-date", "1.2.2030"}, []string{"YYYY-MM-DD"}},
		"blanks":       {[]string{"--responses", healthSurvey, "--comparison", "sex:F:M", "--groupings", "ethnicity", "--ignore", "age_band"}, []string{"--empty"}},
		"undeclared column": {[]string{"--responses", healthSurvey, "--comparison", "sex:F:M", "--empty", "omitted"},
			[]string{"ethnicity", "age_band", "--groupings", "--ignore"}},
		"two inputs from standard input": {[]string{"--responses", "-", "--items", "-", "--comparison", "gender:F:M"}, []string{"standard input"}},
	} {
		args := append([]string{"audit"}, c.args...)
		if !slices.Contains(args, "--evidence") {
			args = append(args, "--evidence", filepath.Join(dir, "out.json"))
		}
		r := difaudit(t, "", args...)
		if r.status != statusBadInput {
			t.Errorf("%s: status %d, want %d\n%s%s", name, r.status, statusBadInput, r.stdout, r.stderr)
		}
		for _, w := range c.words {
			if !strings.Contains(r.stderr, w) {
				t.Errorf("%s: %q is not in the message: %s", name, w, r.stderr)
			}
		}
		if r.stdout != "" {
			t.Errorf("%s: standard output: %s", name, r.stdout)
		}
		if _, err := os.Stat(filepath.Join(dir, "out.json")); err == nil {
			t.Fatalf("%s: something was written", name)
		}
	}
}

func TestAuditWithStandardStreams(t *testing.T) {
	t.Parallel()
	in, err := os.ReadFile(verbalBinary)
	if err != nil {
		t.Fatal(err)
	}
	r := difaudit(t, string(in), "audit", "--responses", "-", "--comparison", "gender:F:M", "--evidence", "-", "--workers", "2")
	r.want(t, statusDone)
	var e map[string]any
	if err := json.Unmarshal([]byte(r.stdout), &e); err != nil {
		t.Fatalf("standard output is not evidence alone: %v", err)
	}
	if !strings.Contains(r.stderr, "S2WantShout") {
		t.Error("the findings table does not stand on standard error")
	}
	if !strings.Contains(r.stderr, "Candidates lost: 5.1 %") {
		t.Error("the share of candidates lost is not said")
	}
}

// Candidates lost are the first line of standard output.
func TestLostCandidatesComeFirst(t *testing.T) {
	t.Parallel()
	r := difaudit(t, "", "audit", "--responses", verbalBinary, "--comparison", "gender:F:M")
	r.want(t, statusDone)
	if !strings.HasPrefix(r.stdout, "Candidates lost: 5.1 %") {
		t.Errorf("standard output starts with %.80q", r.stdout)
	}
}

func TestAuditOfPolytomousItems(t *testing.T) {
	t.Parallel()
	out := filepath.Join(t.TempDir(), "e.json")
	difaudit(t, "", "audit", "--responses", verbalPolytomous, "--comparison", "gender:F:M", "--min-smaller-group", "0", "--min-total", "0", "--evidence", out).
		want(t, statusDone, "no verdict 24")
	if n := readEvidence(t, out).Comparisons[0].Summary.NoVerdict.Of(dif.ReasonNotEstimable); n != 24 {
		t.Errorf("%d items not estimable, want 24", n)
	}
}

func TestInterruptedAuditWritesNothing(t *testing.T) {
	t.Parallel()
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	dir := t.TempDir()
	var stdout, stderr bytes.Buffer
	status := run(ctx, []string{"audit", "--responses", verbalBinary, "--comparison", "gender:F:M", "--evidence", filepath.Join(dir, "e.json")},
		environment{getenv: func(string) string { return "" }, stdout: &stdout, stderr: &stderr, now: time.Now})
	if left, _ := os.ReadDir(dir); status == statusDone || len(left) > 0 {
		t.Errorf("status %d, %d files: %s", status, len(left), stderr.String())
	}
}

func TestCommandWords(t *testing.T) {
	t.Parallel()
	difaudit(t, "").want(t, statusBadInput, "audit", "simulate", "verify", "version")
	difaudit(t, "", "help").want(t, statusDone, "audit")
	difaudit(t, "", "serve").want(t, statusBadInput, "not part of this version")
	difaudit(t, "", "frobnicate").want(t, statusBadInput, "frobnicate")
	difaudit(t, "", "version").want(t, statusDone, dif.EngineVersion, "go1")
	for _, c := range commands() {
		if c.name != "version" {
			difaudit(t, "", c.name, "--help").want(t, statusDone, "--")
		}
	}
}
