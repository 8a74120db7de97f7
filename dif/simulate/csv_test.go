package simulate_test

import (
	"bytes"
	"encoding/csv"
	"slices"
	"strconv"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif/simulate"
)

func records(t *testing.T, b []byte) [][]string {
	t.Helper()
	all, err := csv.NewReader(bytes.NewReader(b)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return all
}

// responses returns the file of responses and that of candidates.
func responses(s *simulate.Simulation, apart bool) (responses, candidates []byte) {
	l := simulate.NewLayout(s, apart)
	responses, candidates = l.ResponsesHeader(nil), l.CandidatesHeader(nil)
	for c := range s.Candidates() {
		responses, candidates = l.Responses(responses, c), l.Candidates(candidates, c)
	}
	return responses, candidates
}

func TestScoredFiles(t *testing.T) {
	t.Parallel()
	d := design(simulate.TwoPL, 60, 40, 12)
	d.Items[11].Role = "pretest"
	d.OmittedShare, d.NotReachedShare = 0.05, 0.05
	s := simulation(t, d)
	b, _ := responses(s, false)
	got := records(t, b)
	if len(got) != 101 || !slices.Equal(got[0][:3], []string{"candidate_id", "group", "Q001"}) || len(got[0]) != 14 {
		t.Fatalf("%d records, header %v", len(got), got[0])
	}
	n, blanks := 0, 0
	for c := range s.Candidates() {
		n++
		want := []string{string(c.ID), []string{"reference", "focal"}[c.Group]}
		for _, a := range c.Answers {
			if a == simulate.Omitted || a == simulate.NotReached {
				want = append(want, "")
				blanks++
			} else {
				want = append(want, strconv.Itoa(int(a)))
			}
		}
		if diff := cmp.Diff(want, got[n]); diff != "" {
			t.Errorf("row %d:\n%s", n+1, diff)
		}
	}
	if blanks == 0 {
		t.Error("no blank cell")
	}
	items := records(t, simulate.NewLayout(s, false).Items(nil))
	if !slices.Equal(items[0], []string{"item_id", "max_score", "role"}) || len(items) != 13 ||
		!slices.Equal(items[1], []string{"Q001", "1", "operational"}) || !slices.Equal(items[12], []string{"Q012", "1", "pretest"}) {
		t.Errorf("items: %v", items)
	}
}

func TestRawFilesWithLabelsApart(t *testing.T) {
	t.Parallel()
	d := design(simulate.Rasch, 30, 20, 3)
	d.Options, d.ExternalCorrelation = 4, 0.9
	d.Groupings = []string{"route, first", "sex"}
	d.Groups[0].Labels, d.Groups[1].Labels = []string{`the "old" one`, "m"}, []string{"new", ""}
	s := simulation(t, d)
	b, people := responses(s, true)
	got, candidates := records(t, b), records(t, people)
	if !slices.Equal(got[0], []string{"candidate_id", "external_score", "Q001", "Q002", "Q003"}) {
		t.Errorf("header %v", got[0])
	}
	if !slices.Equal(candidates[0], []string{"candidate_id", "route, first", "sex"}) ||
		!slices.Equal(candidates[1], []string{"C0000001", `the "old" one`, "m"}) || !slices.Equal(candidates[50], []string{"C0000050", "new", ""}) {
		t.Errorf("candidates %v, %v, %v", candidates[0], candidates[1], candidates[50])
	}
	for i, r := range got[1:] {
		if _, err := strconv.Atoi(r[1]); err != nil || r[0] != candidates[i+1][0] {
			t.Errorf("row %v", r)
		}
		for _, choice := range r[2:] {
			if !slices.Contains([]string{"A", "B", "C", "D"}, choice) {
				t.Errorf("choice %q", choice)
			}
		}
	}
	items := records(t, simulate.NewLayout(s, true).Items(nil))
	if !slices.Equal(items[0], []string{"item_id", "key", "options", "role"}) {
		t.Errorf("items header %v", items[0])
	}
	for i, item := range s.Truth().Items {
		if !slices.Equal(items[i+1], []string{item.ID, *item.Key, "A|B|C|D", "operational"}) {
			t.Errorf("item %v", items[i+1])
		}
	}
}
