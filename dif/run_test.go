package dif

import (
	"context"
	"encoding/csv"
	"os"
	"slices"
	"strconv"
	"testing"
)

// readScored reads a wide file of scored items: candidate_id, then the given number of
// grouping columns, then items; an empty cell is an item not presented. It is the tests'
// own reader, so that this package needs no other.
func readScored(t testing.TB, path string, groupings int) *Data {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	head, rows := rows[0], rows[1:]
	slices.SortFunc(rows, func(a, b []string) int { return slices.Compare(a[:1], b[:1]) })
	d := &Data{IDs: &IDs{}, Answers: NewAnswers(len(head) - 1 - groupings), Received: len(rows)}
	for _, name := range head[1+groupings:] {
		d.Items = append(d.Items, Item{ID: name, Version: "1", Role: RoleOperational, MaxScore: 1})
	}
	for g := range groupings {
		var labels []string
		for _, r := range rows {
			if r[1+g] != "" {
				labels = append(labels, r[1+g])
			}
		}
		slices.Sort(labels)
		labels = slices.Compact(labels)
		codes := make([]uint16, len(rows))
		for i, r := range rows {
			if at, ok := slices.BinarySearch(labels, r[1+g]); ok {
				codes[i] = uint16(at + 1)
			}
		}
		d.Groupings = append(d.Groupings, Grouping{head[1+g], labels, codes})
	}
	for _, r := range rows {
		d.IDs.Append([]byte(r[0]))
		row := d.Answers.Append()
		for i, cell := range r[1+groupings:] {
			if cell == "" {
				row[i] = CodeNotPresented
				continue
			}
			v, err := strconv.Atoi(cell)
			if err != nil {
				t.Fatal(err)
			}
			row[i] = byte(v)
			d.Items[i].MaxScore = max(d.Items[i].MaxScore, v)
		}
	}
	return d
}

func verbalBinary(t testing.TB) *Data {
	return readScored(t, "../testdata/verbal-aggression/verbal-binary.csv", 1)
}

// openPlan compares two groups without minima.
func openPlan(grouping, reference, focal, purification string) Plan {
	p := DefaultPlan()
	p.Comparisons = []PlannedComparison{{grouping, reference, focal}}
	p.Criteria.MinSmallerGroup, p.Criteria.MinTotal = 0, 0
	p.Matching.Purification = purification
	return p
}

func mustRun(t testing.TB, p Plan, d *Data) *Evidence {
	t.Helper()
	e, err := Run(context.Background(), p, d, Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	return e
}

func packageDocumentation(t *testing.T) string {
	t.Helper()
	b, err := os.ReadFile("doc.go")
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}
