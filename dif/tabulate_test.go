package dif

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// mixedData returns candidates with everything the tables must get right: binary and
// polytomous items, pretest items, an item without a key, forms with keys of their own,
// every kind of missing answer, candidates without a label or an external score.
func mixedData(seed uint64, candidates, items int) *Data {
	r := rand.New(rand.NewPCG(seed, 7))
	d := &Data{IDs: &IDs{}, Answers: NewAnswers(items), Received: candidates}
	for i := range items {
		it := Item{ID: fmt.Sprint("item", i), Version: "1", Role: RoleOperational, MaxScore: 1}
		switch i % 6 {
		case 1:
			it.MaxScore = 1 + r.IntN(4)
		case 2:
			it.Options, it.Key = []string{"A", "B", "C"}, []string{"B", "C"}
		case 3:
			it.Role = RolePretest
		case 5:
			if i == 5 {
				it.Options, it.KeyMissing = []string{"A", "B"}, true
			}
		}
		d.Items = append(d.Items, it)
	}
	d.Forms = []Form{{ID: "one"}, {ID: "two"}}
	for i := range items {
		d.Forms[0].Items = append(d.Forms[0].Items, FormItem{Item: i, Position: i})
		if i%4 != 0 {
			fi := FormItem{Item: i, Position: items - i}
			if i%6 == 2 {
				fi.Key = []string{"A"}
			}
			d.Forms[1].Items = append(d.Forms[1].Items, fi)
		}
	}
	g := Grouping{Name: "g", Labels: []string{"a", "b", "c"}}
	for c := range candidates {
		d.IDs.Append(fmt.Appendf(nil, "%08d", c))
		form := r.IntN(2)
		d.FormOf = append(d.FormOf, uint16(form))
		d.External = append(d.External, math.Round(r.NormFloat64()*3))
		if r.IntN(20) == 0 {
			d.External[c] = math.NaN()
		}
		g.Codes = append(g.Codes, uint16(r.IntN(4)))
		row := d.Answers.Append()
		for i := range row {
			top := d.Items[i].MaxScore + 1
			if d.Items[i].Options != nil {
				top = len(d.Items[i].Options)
			}
			row[i] = byte(r.IntN(top))
			switch r.IntN(40) {
			case 0:
				row[i] = CodeOmitted
			case 1:
				row[i] = CodeInvalid
			case 2:
				row[i] = CodeNotReached
			case 3:
				if r.IntN(8) == 0 {
					row[i] = CodeTechnical
				}
			}
			if form == 1 && i%4 == 0 {
				row[i] = CodeNotPresented
			}
		}
	}
	d.Groupings = []Grouping{g}
	return d
}

// bruteTable counts one item candidate by candidate, straight from the definitions.
// The stratum is named by set and score.
func bruteTable(d *Data, variable string, kept map[int]bool, item int, groups [2]uint16) map[string][]uint32 {
	score := func(c, i int) (int, bool) { // score and whether it counts as a scored response
		it := d.Items[i]
		code := d.Answers.Row(c)[i]
		key := it.Key
		for _, fi := range d.Forms[d.FormOf[c]].Items {
			if fi.Item == i && fi.Key != nil {
				key = fi.Key
			}
		}
		switch {
		case it.KeyMissing:
			return 0, false
		case code == CodeOmitted || code == CodeInvalid:
			return 0, true
		case code > MaxCode:
			return 0, false
		case it.Options == nil:
			return int(code), true
		}
		if slices.Contains(key, it.Options[code]) {
			return 1, true
		}
		return 0, true
	}
	out := map[string][]uint32{}
	for c := range d.Candidates() {
		g := slices.Index(groups[:], d.Groupings[0].Codes[c])
		own, ok := score(c, item)
		if g < 0 || !ok {
			continue
		}
		name := ""
		switch variable {
		case MatchExternal:
			if math.IsNaN(d.External[c]) {
				continue
			}
			name = fmt.Sprint(d.External[c] + 0) // both zeros are one level
		default:
			total := 0
			for i := range d.Items {
				if s, _ := score(c, i); kept[i] || i == item {
					total += s
				}
			}
			set := ""
			if variable == MatchTotalWithinSet {
				for i, code := range d.Answers.Row(c) {
					if code != CodeNotPresented && code != CodeTechnical {
						set += fmt.Sprint(i, " ")
					}
				}
			}
			if variable == MatchTotalWithinForm {
				set += d.Forms[d.FormOf[c]].ID
			}
			name = fmt.Sprint(set, "|", total)
		}
		cats := d.Items[item].MaxScore + 1
		if out[name] == nil {
			out[name] = make([]uint32, 2*cats)
		}
		out[name][g*cats+own]++
	}
	return out
}

// The count tables, with items dropped and put back, equal a walk over the candidates.
func TestTablesEqualBruteForce(t *testing.T) {
	t.Parallel()
	for _, size := range []struct{ candidates, items int }{{60, 7}, {3000, 9}, {400, 40}} {
		d := mixedData(uint64(size.candidates), size.candidates, size.items)
		for _, variable := range []string{MatchTotal, MatchTotalWithinSet, MatchTotalWithinForm, MatchExternal} {
			r := &runner{plan: DefaultPlan(), data: d, workers: 2}
			r.plan.Matching.Variable = variable
			if variable == MatchTotalWithinSet {
				r.plan.Matching.Variable = MatchAuto
			}
			if err := r.prepare(context.Background()); err != nil {
				t.Fatal(err)
			}
			if r.variable != variable {
				t.Fatalf("variable %s, want %s", r.variable, variable)
			}
			of := make([]int16, d.Candidates())
			for c, code := range d.Groupings[0].Codes {
				of[c] = int16(code) - 1 // three groups; the comparison takes two of them
				if variable == MatchExternal && math.IsNaN(d.External[c]) {
					of[c] = -1
				}
			}
			a := r.packed.arrange(of, 3)
			tb := &tabulator{arrangement: a, workers: 2}
			if variable == MatchExternal {
				for _, c := range a.order {
					tb.external = append(tb.external, d.External[c])
				}
			}
			for _, dropped := range [][]int{nil, {0}, {1, 2}} {
				kept := map[int]bool{}
				for _, i := range without(r.matching, dropped) {
					kept[i] = true
				}
				tab, err := tb.tabulate(context.Background(), r.packed.mask(func(i int) bool { return kept[i] }), []int{2, 0})
				if err != nil {
					t.Fatal(err)
				}
				var b itemTabler
				pair := tab.pair(a, [2]int{2, 0})
				for item := range d.Items {
					got := b.of(pair, item)
					if d.Items[item].KeyMissing {
						if len(got.Strata) > 0 {
							t.Errorf("an item without a key has a table")
						}
						continue
					}
					compareTables(t, fmt.Sprintf("%d x %d %s without %v item %d", size.candidates, size.items, variable, dropped, item),
						got, bruteTable(d, variable, kept, item, [2]uint16{3, 1}))
				}
			}
		}
	}
}

// compareTables compares the strata that hold both groups one by one, and the others in
// total: the engine does not keep apart what nobody can be matched with.
func compareTables(t *testing.T, what string, got *ItemTable, want map[string][]uint32) {
	t.Helper()
	split := func(cell []uint32) (both bool, sums [2]string) {
		cats := len(cell) / 2
		r, f := cell[:cats], cell[cats:]
		sums = [2]string{fmt.Sprint(r), fmt.Sprint(f)}
		any := func(c []uint32) bool { return slices.ContainsFunc(c, func(n uint32) bool { return n > 0 }) }
		return any(r) && any(f), sums
	}
	count := func(cells [][]uint32) (matched []string, lone []uint32) {
		lone = make([]uint32, 2*got.Categories)
		for _, c := range cells {
			both, sums := split(c)
			if both {
				matched = append(matched, sums[0]+sums[1])
				continue
			}
			for i, n := range c {
				lone[i] += n
			}
		}
		slices.Sort(matched)
		return matched, lone
	}
	var g, w [][]uint32
	for k := range got.Strata {
		g = append(g, slices.Concat(got.group(k, 0), got.group(k, 1)))
	}
	for _, c := range want {
		w = append(w, c)
	}
	gm, gl := count(g)
	wm, wl := count(w)
	if !slices.Equal(gm, wm) || !slices.Equal(gl, wl) {
		t.Errorf("%s:\n got %v, alone %v\nwant %v, alone %v", what, gm, gl, wm, wl)
	}
}

// The evidence does not depend on the number of workers.
func TestWorkersDoNotChangeTheEvidence(t *testing.T) {
	t.Parallel()
	d := mixedData(3, 70000, 12)
	p := openPlan("g", "a", "b", PurifyTwoStage)
	p.Comparisons = append(p.Comparisons, PlannedComparison{"g", "a", "c"})
	for _, variable := range []string{MatchAuto, MatchTotal, MatchTotalWithinForm, MatchExternal} {
		p.Matching.Variable = variable
		var want []byte
		for workers := 1; workers <= 3; workers++ {
			e, err := Run(context.Background(), p, d, Options{Workers: workers})
			if err != nil {
				t.Fatal(err)
			}
			b, err := e.Encode()
			if err != nil {
				t.Fatal(err)
			}
			if want == nil {
				want = b
			}
			if string(b) != string(want) {
				t.Errorf("%s: %d workers give other evidence", variable, workers)
			}
		}
		back, err := DecodeEvidence(want)
		if err != nil {
			t.Fatal(err)
		}
		again, err := back.Encode()
		if err != nil || string(again) != string(want) {
			t.Errorf("%s: reading and writing evidence changes it (%v)", variable, err)
		}
	}
}
