package main

import (
	"bytes"
	"compress/gzip"
	"encoding/csv"
	"encoding/json"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"difaudit/dif/simulate"
)

// simulated runs the command with --out DIR and returns its output.
func simulated(t *testing.T, want int, dir string, args ...string) (stdout, stderr string) {
	t.Helper()
	var out, errs bytes.Buffer
	if got := runSimulate(t.Context(), append([]string{"--out", dir}, args...), &out, &errs); got != want {
		t.Fatalf("%v: status %d, want %d\n%s%s", args, got, want, out.String(), errs.String())
	}
	return out.String(), errs.String()
}

func simulatedRecords(t *testing.T, path string) [][]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	var r io.Reader = f
	if strings.HasSuffix(path, ".gz") {
		if r, err = gzip.NewReader(f); err != nil {
			t.Fatal(err)
		}
	}
	records, err := csv.NewReader(r).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return records
}

func TestSimulateWritesItsFiles(t *testing.T) {
	t.Parallel()
	dir := filepath.Join(t.TempDir(), "new", "exam")
	stdout, stderr := simulated(t, 0, dir, "--model", "2pl", "--candidates", "80:40", "--items", "12", "--impact", "-0.5",
		"--dif", "3:-2.0", "--dif", "7,8:1.5", "--slope-dif", "8:0.25", "--pretest", "2", "--grouping", "route",
		"--labels", "old:new", "--seed", "7", "--omit-share", "0.03", "--not-reached-share", "0.02")
	if stderr != "" {
		t.Errorf("on stderr: %s", stderr)
	}
	command := "difaudit audit --responses " + filepath.Join(dir, "responses.csv") + " --items " + filepath.Join(dir, "items.csv") +
		" --comparison route:old:new --empty by_position\n"
	if !strings.HasSuffix(stdout, command) {
		t.Errorf("output %q does not end in the command %q", stdout, command)
	}

	responses := simulatedRecords(t, filepath.Join(dir, "responses.csv"))
	if len(responses) != 121 || !slices.Equal(responses[0][:3], []string{"candidate_id", "route", "Q001"}) || len(responses[0]) != 14 {
		t.Errorf("%d rows under %v", len(responses), responses[0])
	}
	labels := map[string]int{}
	for _, r := range responses[1:] {
		labels[r[1]]++
		for _, cell := range r[2:] {
			if cell != "0" && cell != "1" && cell != "" {
				t.Errorf("cell %q", cell)
			}
		}
	}
	if labels["old"] != 80 || labels["new"] != 40 {
		t.Errorf("labels %v", labels)
	}
	items := simulatedRecords(t, filepath.Join(dir, "items.csv"))
	if len(items) != 13 || !slices.Equal(items[10], []string{"Q010", "1", "operational"}) || !slices.Equal(items[11], []string{"Q011", "1", "pretest"}) {
		t.Errorf("items %v", items)
	}

	b, err := os.ReadFile(filepath.Join(dir, "truth.json"))
	if err != nil {
		t.Fatal(err)
	}
	// Read by name, as another program would.
	var truth struct {
		Schema string
		Groups []struct {
			Labels []string
			Mean   float64 `json:"ability_mean"`
		}
		Items []struct {
			Item   string
			Groups []struct {
				A, B, C    float64
				Planted    float64  `json:"planted_d_dif"`
				Population *float64 `json:"population_d_dif"`
			}
		}
	}
	if err := json.Unmarshal(b, &truth); err != nil {
		t.Fatal(err)
	}
	if truth.Schema != simulate.TruthSchema || truth.Groups[1].Mean != -0.5 || truth.Groups[1].Labels[0] != "new" {
		t.Errorf("truth: %+v", truth)
	}
	planted := map[string]float64{"Q003": -2, "Q007": 1.5, "Q008": 1.5}
	for _, item := range truth.Items {
		r, f := item.Groups[0], item.Groups[1]
		want := planted[item.Item]
		if f.Planted != want || !(math.Abs(-2.35*f.A*(f.B-r.B)-want) <= 1e-12) || f.Population == nil {
			t.Errorf("%s: reference %+v, focal %+v, want D-DIF %v", item.Item, r, f, want)
		}
		if slope := f.A - r.A; !(math.Abs(slope-map[string]float64{"Q008": 0.25}[item.Item]) <= 1e-12) {
			t.Errorf("%s: slopes %v, %v", item.Item, r.A, f.A)
		}
	}
	if left, _ := filepath.Glob(filepath.Join(dir, "*.partial")); len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
}

func TestSimulateRawCompressedWithCandidates(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	stdout, _ := simulated(t, 0, dir, "--model", "3pl", "--candidates", "30:20", "--items", "5", "--raw", "--options", "5",
		"--gzip", "--candidates-file", "--external", "0.9", "--labels", "first time:again")
	responses := simulatedRecords(t, filepath.Join(dir, "responses.csv.gz"))
	candidates := simulatedRecords(t, filepath.Join(dir, "candidates.csv.gz"))
	if !slices.Equal(responses[0][:3], []string{"candidate_id", "external_score", "Q001"}) || len(responses) != 51 {
		t.Errorf("%d rows under %v", len(responses), responses[0])
	}
	if !slices.Equal(candidates[50], []string{"C0000050", "again"}) {
		t.Errorf("candidates %v", candidates)
	}
	for _, r := range responses[1:] {
		for _, cell := range r[2:] {
			if len(cell) != 1 || !strings.Contains("ABCDE", cell) {
				t.Errorf("choice %q", cell)
			}
		}
	}
	if items := simulatedRecords(t, filepath.Join(dir, "items.csv")); !slices.Equal(items[0], []string{"item_id", "key", "options", "role"}) || items[1][2] != "A|B|C|D|E" {
		t.Errorf("items %v", items)
	}
	if want := "--candidates " + filepath.Join(dir, "candidates.csv.gz") + " --comparison 'group:first time:again' --matching external\n"; !strings.HasSuffix(stdout, want) {
		t.Errorf("output %q does not end in %q", stdout, want)
	}
}

func TestSimulateRepeats(t *testing.T) {
	t.Parallel()
	read := func(dir string) (all []byte) {
		for _, name := range []string{"responses.csv.gz", "items.csv", "candidates.csv.gz", "truth.json"} {
			b, err := os.ReadFile(filepath.Join(dir, name))
			if err != nil {
				t.Fatal(err)
			}
			all = append(all, b...)
		}
		return all
	}
	args := []string{"--candidates", "50:50", "--items", "9", "--raw", "--gzip", "--candidates-file", "--dif", "2:-1"}
	a, b, c := t.TempDir(), t.TempDir(), t.TempDir()
	simulated(t, 0, a, args...)
	simulated(t, 0, b, args...)
	simulated(t, 0, c, append(args, "--seed", "2")...)
	if !bytes.Equal(read(a), read(b)) {
		t.Error("the same seed and options give other files")
	}
	if bytes.Equal(read(a), read(c)) {
		t.Error("another seed gives the same files")
	}
}

func TestSimulateKeepsEarlierFiles(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	small := []string{"--candidates", "5:5", "--items", "3"}
	simulated(t, 0, dir, small...)
	before, err := os.ReadFile(filepath.Join(dir, "responses.csv"))
	if err != nil {
		t.Fatal(err)
	}
	_, stderr := simulated(t, 2, dir, append(small, "--seed", "2")...)
	if !strings.Contains(stderr, "responses.csv exists already") || !strings.Contains(stderr, "--force") {
		t.Errorf("refusal: %s", stderr)
	}
	if now, _ := os.ReadFile(filepath.Join(dir, "responses.csv")); !bytes.Equal(now, before) {
		t.Error("a refused run changed the file")
	}
	_, stderr = simulated(t, 2, dir, append(small, "--gzip", "--force")...)
	if !strings.Contains(stderr, "would not belong to them") {
		t.Errorf("refusal: %s", stderr)
	}
	simulated(t, 0, dir, append(small, "--seed", "2", "--force")...)
	if now, _ := os.ReadFile(filepath.Join(dir, "responses.csv")); bytes.Equal(now, before) {
		t.Error("--force did not overwrite the file")
	}
}

func TestSimulateBadUsage(t *testing.T) {
	t.Parallel()
	for _, tt := range []struct {
		args []string
		want string
	}{
		{[]string{"--candidates", "1000"}, "--candidates 1000: give the numbers of both groups, such as 1000:500"},
		{[]string{"--candidates", "10:0"}, "--candidates 10:0"},
		{[]string{"--labels", "f"}, "--labels f: give the labels of both groups"},
		{[]string{"--labels", "a:b:c"}, "which separate names"},
		{[]string{"--grouping", "form"}, "name of another column"},
		{[]string{"--items", "0"}, "--items 0: give at least 1"},
		{[]string{"--items", "10", "--pretest", "10"}, "--pretest 10: with 10 items give 0 to 9"},
		{[]string{"--dif", "41:-2"}, "--dif 41:-2: there is no item 41: name items 1 to 40"},
		{[]string{"--dif", "3:-2", "--dif", "3,4:1"}, "--dif 3,4:1: item 3 has its shift already"},
		{[]string{"--dif", "3"}, "give item numbers and a shift, such as 3:-2.0"},
		{[]string{"--dif", "Q1:2"}, `"Q1" is no item number`},
		{[]string{"--dif", "3:NaN"}, "item 3: planted D-DIF NaN"},
		{[]string{"--slope-dif", "3:-9"}, "item 3: its slope is"},
		{[]string{"--model", "rasch", "--slope-dif", "3:0.2"}, "the Rasch model has one slope for all"},
		{[]string{"--model", "mokken"}, `model "mokken": use rasch, 2pl or 3pl`},
		{[]string{"--impact", "NaN"}, "mean ability of NaN"},
		{[]string{"--options", "3"}, "--options needs --raw"},
		{[]string{"--raw", "--options", "0"}, "--options 0: give at least 2"},
		{[]string{"--omit-share", "0.9"}, "only wrong answers are omitted"},
		{[]string{"--not-reached-share", "0.5"}, "give a share from 0 to 0.25"},
		{[]string{"--colour"}, "--colour is not an option"},
		{[]string{"--seed", "1", "more"}, `"more" is no option`},
		{[]string{"--out", "elsewhere"}, "--out is given twice"},
	} {
		dir := filepath.Join(t.TempDir(), "out")
		stdout, stderr := simulated(t, 2, dir, tt.args...)
		if !strings.Contains(stderr, tt.want) || stdout != "" {
			t.Errorf("%v: %q, want %q", tt.args, stderr, tt.want)
		}
		if _, err := os.Stat(dir); err == nil {
			t.Errorf("%v: a refused run made its directory", tt.args)
		}
	}
	var out, errs bytes.Buffer
	if got := runSimulate(t.Context(), nil, &out, &errs); got != 2 || !strings.Contains(errs.String(), "add --out DIR") {
		t.Errorf("without a directory: status %d, %s", got, errs.String())
	}
	file := filepath.Join(t.TempDir(), "file")
	if err := os.WriteFile(file, nil, 0o666); err != nil {
		t.Fatal(err)
	}
	if _, stderr := simulated(t, 2, file); !strings.Contains(stderr, "this is a file: name a directory") {
		t.Errorf("a file as directory: %s", stderr)
	}
}

func TestSimulateHelp(t *testing.T) {
	t.Parallel()
	stdout, stderr := simulated(t, 0, t.TempDir(), "--help")
	for _, want := range []string{"--out DIR", "--dif ITEMS:DELTA", "--labels REFERENCE:FOCAL", "(default 2pl)"} {
		if !strings.Contains(stdout, want) {
			t.Errorf("help lacks %q", want)
		}
	}
	if stderr != "" {
		t.Errorf("on stderr: %s", stderr)
	}
}
