package intake

import (
	"errors"
	"strings"
	"testing"

	"difaudit/dif"
)

// input is a request written out as text; an empty text is a file not given.
type input struct {
	responses, items, forms, candidates string
	plan                                func(*dif.Plan)
}

// request returns the request of an input; without a plan one comparison of sex, m with f.
func (in input) request() Request {
	plan := sexPlan()
	if in.plan != nil {
		in.plan(&plan)
	}
	file := func(name, content string) *File {
		if content == "" {
			return nil
		}
		return &File{Name: name, Reader: strings.NewReader(content)}
	}
	return Request{
		Responses: &File{Name: "responses.csv", Reader: strings.NewReader(in.responses)}, Plan: plan,
		Items: file("items.csv", in.items), Forms: file("forms.csv", in.forms), Candidates: file("candidates.csv", in.candidates),
	}
}

// good reads an input that has no errors.
func (in input) good(t *testing.T) *Result {
	t.Helper()
	result, err := Read(t.Context(), in.request())
	if err != nil {
		t.Fatalf("unexpected error: %v", err)
	}
	checkData(t, result.Data)
	return result
}

// problems reads an input and returns what was reported.
func (in input) problems(t *testing.T) *Problems {
	t.Helper()
	result, err := Read(t.Context(), in.request())
	var problems *Problems
	switch {
	case err == nil:
		checkData(t, result.Data)
		return result.Problems
	case errors.As(err, &problems):
		return problems
	}
	t.Fatalf("reading failed: %v", err)
	return nil
}

// rows returns the answers of every candidate, one string of codes per candidate:
// digits for 0..9, and n, o, r, i, t for the kinds of missing answers.
func rows(d *dif.Data) []string {
	var out []string
	for i := range d.Candidates() {
		var b strings.Builder
		for _, c := range d.Answers.Row(i) {
			switch c {
			case dif.CodeNotPresented:
				b.WriteByte('n')
			case dif.CodeOmitted:
				b.WriteByte('o')
			case dif.CodeNotReached:
				b.WriteByte('r')
			case dif.CodeInvalid:
				b.WriteByte('i')
			case dif.CodeTechnical:
				b.WriteByte('t')
			default:
				b.WriteByte('0' + c)
			}
		}
		out = append(out, b.String())
	}
	return out
}

func ids(d *dif.Data) []string {
	var out []string
	for i := range d.IDs.Len() {
		out = append(out, string(d.IDs.At(i)))
	}
	return out
}

// checkData fails where the parts of the data do not fit together.
func checkData(t *testing.T, d *dif.Data) {
	t.Helper()
	n := d.Candidates()
	if n == 0 || len(d.Items) == 0 {
		t.Fatalf("%d candidates, %d items", n, len(d.Items))
	}
	if d.Answers.Items() != len(d.Items) || d.IDs.Len() != n {
		t.Fatalf("%d answer columns for %d items, %d identifiers for %d candidates", d.Answers.Items(), len(d.Items), d.IDs.Len(), n)
	}
	for what, length := range map[string]int{"forms": len(d.FormOf), "attempts": len(d.Attempt), "external scores": len(d.External)} {
		if length != 0 && length != n {
			t.Fatalf("%d %s for %d candidates", length, what, n)
		}
	}
	for _, f := range d.FormOf {
		if int(f) >= len(d.Forms) {
			t.Fatalf("form %d of %d", f, len(d.Forms))
		}
	}
	for _, f := range d.Forms {
		for _, e := range f.Items {
			if e.Item >= len(d.Items) {
				t.Fatalf("form %q names item %d of %d", f.ID, e.Item, len(d.Items))
			}
		}
	}
	for _, g := range d.Groupings {
		if len(g.Codes) != n {
			t.Fatalf("grouping %q has %d codes for %d candidates", g.Name, len(g.Codes), n)
		}
		for i := 1; i < len(g.Labels); i++ {
			if g.Labels[i-1] >= g.Labels[i] {
				t.Fatalf("labels of %q are not sorted", g.Name)
			}
		}
		for _, c := range g.Codes {
			if int(c) > len(g.Labels) {
				t.Fatalf("grouping %q has code %d and %d labels", g.Name, c, len(g.Labels))
			}
		}
	}
	for i := 1; i < n; i++ {
		c := strings.Compare(string(d.IDs.At(i-1)), string(d.IDs.At(i)))
		if c > 0 || c == 0 && (d.Attempt == nil || d.Attempt[i-1] >= d.Attempt[i]) {
			t.Fatalf("candidates %d and %d are not in order", i, i+1)
		}
	}
	for i := range n {
		for k, c := range d.Answers.Row(i) {
			it := d.Items[k]
			top := it.MaxScore
			if it.Options != nil || it.KeyMissing {
				top = len(it.Options) - 1
			}
			if c == blankCode || c <= dif.MaxCode && int(c) > top {
				t.Fatalf("candidate %d, item %q: code %d above %d", i+1, it.ID, c, top)
			}
		}
	}
	excluded := 0
	for _, e := range d.Exclusions {
		if e.Grouping == nil {
			excluded += e.Count
		}
	}
	if d.Received-excluded != n {
		t.Fatalf("%d received, %d excluded, %d left", d.Received, excluded, n)
	}
}
