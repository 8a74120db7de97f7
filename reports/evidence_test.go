package reports

import (
	"encoding/csv"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"strconv"
	"testing"
	"time"

	"difaudit/dif"
)

// What a caller gives beside the evidence.
const reportDigest = "5f1c0a9be2d4773a86c1f0d29e4b8a7730cc1e95a2b4d6f8091a3c5e7f90b2d4"

var reportOptions = Options{Date: time.Date(2026, 3, 4, 22, 30, 0, 0, time.UTC), EvidenceSHA256: reportDigest}

func ptr[T any](v T) *T { return &v }

// audit runs the engine on data built in memory.
func audit(t testing.TB, plan dif.Plan, data *dif.Data) *dif.Evidence {
	t.Helper()
	e, err := dif.Run(t.Context(), plan, data, dif.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// planFor is the default plan with one comparison.
func planFor(grouping, reference, focal string) dif.Plan {
	p := dif.DefaultPlan()
	p.Title = "Spring sitting"
	p.Comparisons = []dif.PlannedComparison{{Grouping: grouping, Reference: reference, Focal: focal}}
	return p
}

// verbal audits the open verbal aggression data (testdata/verbal-aggression/README.md):
// 243 F against 73 M on 24 binary items.
func verbal(t testing.TB, change func(*dif.Plan)) *dif.Evidence {
	t.Helper()
	file, err := os.Open("../testdata/verbal-aggression/verbal-binary.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	items := rows[0][2:]
	data := newData(items, "gender", []string{"F", "M"})
	for _, row := range rows[1:] {
		scores := make([]byte, len(items))
		for i, cell := range row[2:] {
			n, err := strconv.Atoi(cell)
			if err != nil {
				t.Fatal(err)
			}
			scores[i] = byte(n)
		}
		addCandidate(data, row[0], row[1], scores)
	}
	plan := planFor("gender", "F", "M")
	plan.Title = "Verbal aggression, want and do"
	if change != nil {
		change(&plan)
	}
	return audit(t, plan, data)
}

func newData(items []string, grouping string, labels []string) *dif.Data {
	d := &dif.Data{IDs: &dif.IDs{}, Answers: dif.NewAnswers(len(items))}
	for _, id := range items {
		d.Items = append(d.Items, dif.Item{ID: id, Version: "1", Role: dif.RoleOperational, MaxScore: 1})
	}
	d.Groupings = []dif.Grouping{{Name: grouping, Labels: labels}}
	d.Sources = []dif.Source{{Kind: "responses", SHA256: "0a1b2c3d4e5f60718293a4b5c6d7e8f90a1b2c3d4e5f60718293a4b5c6d7e8f9"}}
	return d
}

// addCandidate appends a candidate; identifiers come in bytewise order. A label that
// the data do not know is not stated.
func addCandidate(d *dif.Data, id, label string, scores []byte) {
	d.IDs.Append([]byte(id))
	copy(d.Answers.Append(), scores)
	g := &d.Groupings[0]
	g.Codes = append(g.Codes, uint16(slices.Index(g.Labels, label)+1))
	d.Received++
	d.Sources[0].Rows++
}

// invented describes answers drawn from a Rasch model.
type invented struct {
	items    []string
	grouping string
	sizes    map[string]int  // candidates by label; "" is not stated
	shift    map[int]float64 // by item: how much harder, in logits, for all labels but the first
	impact   float64         // how much lower their mean is
}

func (v invented) draw(seed uint64) *dif.Data {
	r := rand.New(rand.NewPCG(seed, 7))
	var labels []string
	for l := range v.sizes {
		if l != "" {
			labels = append(labels, l)
		}
	}
	slices.Sort(labels)
	d := newData(v.items, v.grouping, labels)
	scores := make([]byte, len(v.items))
	for k, label := range append(slices.Clone(labels), "") {
		for range v.sizes[label] {
			theta := r.NormFloat64()
			if k > 0 {
				theta -= v.impact
			}
			for i := range scores {
				b := -2 + 4*float64(i)/float64(max(1, len(scores)-1))
				if k > 0 {
					b += v.shift[i]
				}
				scores[i] = 0
				if r.Float64() < 1/(1+math.Exp(b-theta)) {
					scores[i] = 1
				}
			}
			addCandidate(d, fmt.Sprintf("C%07d", d.Received), label, scores)
		}
	}
	return d
}

func numbered(prefix string, n int) []string {
	items := make([]string, n)
	for i := range items {
		items[i] = fmt.Sprintf("%s%03d", prefix, i+1)
	}
	return items
}

// external audits planted levels: three external scores, 40 items of which one is much
// harder and one much easier for the focal group, and one nobody of which group m got wrong.
func external(t testing.TB) *dif.Evidence {
	d := invented{numbered("P", 40), "sex", map[string]int{"f": 700, "m": 350}, map[int]float64{5: 1.2, 30: -1.2}, 0.2}.draw(17)
	for c := range d.Received {
		d.External = append(d.External, float64(c%3))
		if c >= 700 {
			d.Answers.Row(c)[7] = 1
		}
	}
	p := planFor("sex", "f", "m")
	p.Matching.Variable = dif.MatchExternal
	return audit(t, p, d)
}
