package intake

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"
)

// manyForms writes a forms file with one item on each form, whose key and option order
// line gives.
func manyForms(n int, line func(form int) string) string {
	var b strings.Builder
	b.WriteString("form,position,item_id,key,option_order\n")
	for f := range n {
		fmt.Fprintf(&b, "F%05d,%s\n", f, line(f))
	}
	return b.String()
}

// As many forms as can be held: the time must not grow with their square, which would
// be minutes here.
func TestManyForms(t *testing.T) {
	t.Parallel()
	const n = 65_000
	orders := []string{"A|B|C|D", "B|A|C|D", "C|D|A|B"}
	keys := []string{"A", "B", "C"} // the option A in each of the orders
	in := input{
		responses: "candidate_id,sex,form,Q1\na,m,F00000,A\nb,f,F00001,B\n", items: "item_id,options\nQ1,4\n",
		forms: manyForms(n, func(f int) string { return "1,Q1," + keys[f%3] + "," + orders[f%3] }),
	}
	d := in.good(t).Data
	if len(d.Forms) != n {
		t.Errorf("%d forms, want %d", len(d.Forms), n)
	}
	in.forms = manyForms(n, func(f int) string { return fmt.Sprintf("1,Q1,%c,", "ABCD"[f%4]) })
	if p := in.problems(t); p.Count(keyContradictory) != n-1 {
		t.Errorf("%d contradictions, want %d", p.Count(keyContradictory), n-1)
	}
	// One form of many rows.
	var long strings.Builder
	long.WriteString("form,position,item_id\n")
	for i := range maxColumns {
		fmt.Fprintf(&long, "F,%d,Q%d\nF,%d,Q%d\n", i, i, i, i)
	}
	in = input{responses: "candidate_id,sex,form,Q1\na,m,F,1\nb,f,F,1\n", forms: long.String()}
	if p := in.problems(t); p.Count(duplicateOnForm) != 2*maxColumns {
		t.Errorf("%d duplicates, want %d", p.Count(duplicateOnForm), 2*maxColumns)
	}
}

// Which earlier row a contradictory key is compared with.
func TestContradictionsNameTheFirstRow(t *testing.T) {
	t.Parallel()
	keys := []string{"A", "A", "B", "A", "C", "B|A", "A|B"}
	p := input{
		responses: "candidate_id,sex,form,Q1\na,m,F00000,A\nb,f,F00001,B\n", items: "item_id,options\nQ1,4\n",
		forms: manyForms(len(keys), func(f int) string { return "1,Q1," + keys[f] + "," }),
	}.problems(t)
	against := map[int]int{4: 2, 5: 4, 6: 2, 7: 2, 8: 2} // by row of the forms file
	k := p.kind(keyContradictory)
	if k.Count != len(against) {
		t.Errorf("%d contradictions, want %d", k.Count, len(against))
	}
	for _, o := range k.Occurrences {
		if !strings.Contains(o.Message, fmt.Sprintf("forms.csv, row %d,", against[o.Row])) {
			t.Errorf("%v; want row %d", o, against[o.Row])
		}
	}
}

func TestFormsObeyTheContext(t *testing.T) {
	t.Parallel()
	ended, cancel := context.WithCancel(t.Context())
	cancel()
	set, known := newFormSet(), newCatalogue()
	known.add(&item{})
	if err := set.checkKeys(ended, known, &Problems{}); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v, want the end of the context", err)
	}
}
