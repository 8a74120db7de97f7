package dif

import (
	"fmt"
	"math/rand/v2"
	"slices"
	"testing"
)

// Arranging in place gives the rows in the wanted order, whatever is left out.
func TestArrange(t *testing.T) {
	t.Parallel()
	r := rand.New(rand.NewPCG(9, 1))
	for _, n := range []int{0, 1, 2, 50, answerChunk - 1, answerChunk, 2*answerChunk + 7} {
		for _, keep := range []int{n, n * 2 / 3, min(n, 1), 0} {
			a, ids := NewAnswers(3), &IDs{}
			for i := range n {
				copy(a.Append(), []byte{byte(i), byte(i >> 8), byte(i >> 16)})
				ids.Append(fmt.Appendf(nil, "id%d", i))
			}
			order := make([]int32, 0, keep)
			for _, i := range r.Perm(n)[:keep] {
				order = append(order, int32(i))
			}
			want := slices.Clone(order)
			a.Arrange(order)
			ids = ids.Arrange(order)
			if !slices.Equal(order, want) {
				t.Fatal("the order was changed")
			}
			if a.Len() != keep || ids.Len() != keep {
				t.Fatalf("%d of %d: %d rows, %d identifiers", keep, n, a.Len(), ids.Len())
			}
			for at, i := range order {
				if got := a.Row(at); int32(got[0])|int32(got[1])<<8|int32(got[2])<<16 != i {
					t.Fatalf("%d of %d: row %d is %v, want %d", keep, n, at, got, i)
				}
				if got := string(ids.At(at)); got != fmt.Sprintf("id%d", i) {
					t.Fatalf("identifier %d is %s, want id%d", at, got, i)
				}
			}
			copy(a.Append(), []byte{7, 7, 7}) // still grows
			if a.Len() != keep+1 || a.Row(keep)[0] != 7 {
				t.Fatal("a row cannot be added after arranging")
			}
		}
	}
}

// The digest covers answers, labels that the plan uses, keys and identifiers, and nothing else.
func TestDigest(t *testing.T) {
	t.Parallel()
	base := func() *Data { return mixedData(1, 50, 7) }
	want := base().Digest([]string{"g"})
	if len(want) != 64 || want != base().Digest([]string{"g"}) {
		t.Fatalf("digest %q", want)
	}
	for name, change := range map[string]func(d *Data){
		"answer":     func(d *Data) { d.Answers.Row(3)[2] = CodeOmitted },
		"label":      func(d *Data) { d.Groupings[0].Codes[4] = 3 - d.Groupings[0].Codes[4]%3 },
		"key":        func(d *Data) { d.Items[2].Key = []string{"B"} },
		"form key":   func(d *Data) { d.Forms[1].Items[1].Key = []string{"C"} },
		"form":       func(d *Data) { d.FormOf[0] = 1 - d.FormOf[0] },
		"score":      func(d *Data) { d.External[7] = 99 },
		"no score":   func(d *Data) { d.External = nil },
		"maximum":    func(d *Data) { d.Items[0].MaxScore = 2 },
		"identifier": func(d *Data) { d.IDs.block[0] = '1' },
		"version":    func(d *Data) { d.Items[0].Version = "2" },
	} {
		d := base()
		change(d)
		if d.Digest([]string{"g"}) == want {
			t.Errorf("a changed %s keeps the digest", name)
		}
	}
	d := base()
	d.Groupings = append(d.Groupings, Grouping{Name: "other", Labels: []string{"x"}, Codes: make([]uint16, 50)})
	if d.Digest([]string{"g"}) != want {
		t.Error("a grouping the plan does not use changes the digest")
	}
}

func TestBrokenDataAreRefused(t *testing.T) {
	t.Parallel()
	plan := openPlan("g", "a", "b", PurifyNone)
	for name, change := range map[string]func(d *Data){
		"identifiers": func(d *Data) { d.IDs = &IDs{} },
		"order":       func(d *Data) { d.IDs.block[0] = '9' },
		"codes":       func(d *Data) { d.Groupings[0].Codes = d.Groupings[0].Codes[1:] },
		"label code":  func(d *Data) { d.Groupings[0].Codes[0] = 9 },
		"labels":      func(d *Data) { slices.Reverse(d.Groupings[0].Labels) },
		"form":        func(d *Data) { d.FormOf[0] = 5 },
		"items":       func(d *Data) { d.Items = d.Items[1:] },
		"maximum":     func(d *Data) { d.Items[0].MaxScore = 250 },
	} {
		d := mixedData(1, 50, 7)
		change(d)
		if _, err := Run(t.Context(), plan, d, Options{}); err == nil {
			t.Errorf("broken %s are not noticed", name)
		}
	}
}
