package dif

import (
	"strings"
	"testing"
)

func TestDifferences(t *testing.T) {
	t.Parallel()
	stored := `{"engine":{"version":"1"},"inputs":{"n":5},"comparisons":[{"items":[{"item":"Q1","delta":1.5,"class":"A","se":null},{"item":"Q2","delta":2}]}]}`
	for _, c := range []struct{ name, recomputed, want string }{
		{"equal", stored, ""},
		{"within 1e-9", strings.Replace(stored, "1.5", "1.5000000001", 1), ""},
		{"other form of a number", strings.Replace(stored, "1.5", "15e-1", 1), ""},
		{"number", strings.Replace(stored, "1.5", "1.50001", 1), "comparisons[1].items[Q1].delta: stored 1.5, recomputed 1.50001"},
		{"text", strings.Replace(stored, `"A"`, `"B-"`, 1), `comparisons[1].items[Q1].class: stored "A", recomputed "B-"`},
		{"null", strings.Replace(stored, "null", "0", 1), "comparisons[1].items[Q1].se: stored null, recomputed 0"},
		{"missing key", strings.Replace(stored, `,"se":null`, "", 1), "comparisons[1].items[Q1].se: stored null, not recomputed"},
		{"further key", strings.Replace(stored, `"se":null`, `"se":null,"more":[1]`, 1), "comparisons[1].items[Q1].more: not stored, recomputed a list of 1"},
		{"list", strings.Replace(stored, `,{"item":"Q2","delta":2}`, "", 1), "comparisons[1].items: stored a list of 2, recomputed a list of 1"},
		{"kind", strings.Replace(stored, `{"version":"1"}`, `"1"`, 1), "engine: stored an object"},
		{"order of causes", strings.NewReplacer(`"n":5`, `"n":6`, "1.5", "1.6").Replace(stored), "inputs.n"},
	} {
		sentences, total, err := Differences([]byte(stored), []byte(c.recomputed), 10)
		if err != nil {
			t.Fatal(err)
		}
		if total != len(sentences) {
			t.Errorf("%s: %d differences, %d sentences", c.name, total, len(sentences))
		}
		switch {
		case c.want == "" && total > 0:
			t.Errorf("%s: %v", c.name, sentences)
		case c.want != "" && (total == 0 || !strings.HasPrefix(sentences[0], c.want)):
			t.Errorf("%s: %v, want %q first", c.name, sentences, c.want)
		}
	}
	sentences, total, err := Differences([]byte(`{"a":1,"b":2,"c":3}`), []byte(`{"a":2,"b":3,"c":4}`), 2)
	if err != nil || total != 3 || len(sentences) != 2 {
		t.Errorf("%d of %d sentences, %v", len(sentences), total, err)
	}
	if _, _, err := Differences([]byte(`{`), []byte(`{}`), 2); err == nil {
		t.Error("broken JSON is compared")
	}
}

func TestFitFailed(t *testing.T) {
	t.Parallel()
	e := &Evidence{Comparisons: []Comparison{{Items: []Finding{{}}}}}
	k := &e.Comparisons[0].Items[0].Classification
	for _, c := range []struct {
		reason, detail string
		failed         bool
	}{
		{ReasonNotConverged, "", true}, {ReasonNotEstimable, "separation", true}, {ReasonNotEstimable, "singular_information", true},
		{ReasonNotEstimable, DetailInfiniteOddsRatio, false}, {ReasonNoVariation, DetailNoInformativeStrata, false},
	} {
		k.Reason, k.Detail = &c.reason, &c.detail
		if e.FitFailed() != c.failed {
			t.Errorf("%s, %s: failed %v", c.reason, c.detail, !c.failed)
		}
	}
}
