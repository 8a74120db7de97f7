package dif

import (
	"bytes"
	"fmt"
	"math"
	"testing"
)

// FuzzRun: whatever the answers, labels, forms and scores, an audit ends with evidence that
// can be written and read, agrees with itself, gives every item a class or a reason, and
// counts each item once.
func FuzzRun(f *testing.F) {
	f.Add([]byte{}, byte(3), byte(0))
	f.Add([]byte{1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15, 16}, byte(2), byte(1))
	f.Add(bytes.Repeat([]byte{0, 1, 250, 251, 7, 2, 252, 253, 254, 1}, 30), byte(5), byte(2))
	f.Add(bytes.Repeat([]byte{3, 0, 1, 1, 0, 9, 1, 0, 1}, 40), byte(7), byte(3))
	f.Fuzz(func(t *testing.T, b []byte, items, mode byte) {
		n := 1 + int(items%9)
		width := n + 3 // group, form, external score, answers
		if len(b) < width || len(b) > 4000 {
			return
		}
		d := &Data{IDs: &IDs{}, Answers: NewAnswers(n), Forms: []Form{{ID: "one"}, {ID: "two"}}}
		for i := range n {
			it := Item{ID: fmt.Sprint("i", i), Version: "1", Role: RoleOperational, MaxScore: 1 + i%3}
			switch {
			case i == 4:
				it.Role = RolePretest
			case i == 5:
				it.Options, it.KeyMissing, it.MaxScore = []string{"A", "B"}, true, 1
			case i == 6:
				it.Options, it.Key, it.MaxScore = []string{"A", "B", "C"}, []string{"B"}, 1
			}
			d.Items = append(d.Items, it)
		}
		g := Grouping{Name: "g", Labels: []string{"a", "b", "c"}}
		for at := 0; at+width <= len(b); at += width {
			row := b[at : at+width]
			d.IDs.Append(fmt.Appendf(nil, "%06d", at))
			g.Codes = append(g.Codes, uint16(row[0]%4))
			d.FormOf = append(d.FormOf, uint16(row[1]%2))
			d.External = append(d.External, []float64{0, 1, 2, -1.5, 1e308, math.NaN()}[row[2]%6])
			answers := d.Answers.Append()
			for i := range answers {
				v := row[3+i]
				top := d.Items[i].MaxScore + 1
				if d.Items[i].Options != nil {
					top = len(d.Items[i].Options)
				}
				if v < CodeNotPresented || v > CodeTechnical {
					v %= byte(top)
				}
				answers[i] = v
			}
		}
		d.Received = d.Candidates()
		g.Codes[0], g.Codes[len(g.Codes)-1] = 1, 2
		if len(g.Codes) < 2 {
			return
		}
		d.Groupings = []Grouping{g}
		p := openPlan("g", "a", "b", []string{PurifyNone, PurifyTwoStage}[mode%2])
		p.Matching.Variable = []string{MatchAuto, MatchTotal, MatchTotalWithinForm, MatchExternal}[mode/2%4]
		e, err := Run(t.Context(), p, d, Options{Workers: 1})
		if err != nil {
			t.Fatal(err)
		}
		written, err := e.Encode()
		if err != nil {
			t.Fatal(err)
		}
		back, err := DecodeEvidence(written)
		if err != nil {
			t.Fatal(err)
		}
		if again, err := back.Encode(); err != nil || !bytes.Equal(again, written) {
			t.Fatalf("reading and writing changes the evidence: %v", err)
		}
		if said := back.Disagreements(); len(said) > 0 {
			t.Fatalf("disagreements: %v", said)
		}
		s := e.Comparisons[0].Summary
		if s.Classes.Total()+s.NoVerdict.Total() != n {
			t.Fatalf("%d items, summary %+v", n, s)
		}
	})
}
