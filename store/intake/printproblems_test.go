package intake

import (
	"fmt"
	"strings"
	"testing"
)

// A message that all occurrences share stands once, and every place is named.
func TestPrintSharedMessage(t *testing.T) {
	t.Parallel()
	text := printed(t, input{responses: fourRows + strings.Repeat(",m,1,1\n", 30) + strings.Repeat("e,m,1,1\n", 2)}.problems(t))
	for _, words := range []string{
		"error empty_candidate_id, 30: rows without a candidate identifier\n  the row has no candidate identifier; give one or remove the row\n",
		"    responses.csv, column candidate_id, rows 6, 7, 8, 9, 10, ", " 24, 25\n    responses.csv, column candidate_id, rows 26, 27,", " 34, 35\n",
		"  responses.csv, row 37: the row is an exact copy of row 36; it is not used\n",
	} {
		if !strings.Contains(text, words) {
			t.Errorf("the text lacks %q:\n%s", words, text)
		}
	}
	if n := strings.Count(text, "give one or remove"); n != 1 {
		t.Errorf("the message stands %d times", n)
	}
	for what, c := range map[string]struct {
		all  []Occurrence
		want string
	}{
		"no column":      {[]Occurrence{{"a", 3, "", "m"}, {"a", 4, "", "m"}, {"b", 4, "", "m"}}, "a, rows 3, 4|b, row 4"},
		"one row":        {[]Occurrence{{"a", 3, "x", "m"}, {"a", 3, "y", "m"}, {"a", 5, "y", "m"}}, "a, row 3, columns x, y|a, row 5, column y"},
		"whole file":     {[]Occurrence{{"a", 0, "x", "m"}, {"a", 0, "y", "m"}}, "a, columns x, y"},
		"several files":  {[]Occurrence{{"a", 0, "", "m"}, {"b", 0, "", "m"}}, "a|b"},
		"column changes": {[]Occurrence{{"a", 1, "x", "m"}, {"a", 2, "x", "m"}, {"a", 3, "y", "m"}, {"a", 4, "y", "m"}}, "a, column x, rows 1, 2|a, column y, rows 3, 4"},
	} {
		if got := strings.Join(places(c.all), "|"); got != c.want {
			t.Errorf("%s: %q, want %q", what, got, c.want)
		}
	}
}

// The first hundred occurrences of a kind are printed, then the number of the others.
func TestPrintHundred(t *testing.T) {
	t.Parallel()
	responses := "candidate_id,sex,Q1\n"
	for i := range 130 {
		responses += fmt.Sprintf("%03d,%c,%d\n", i, "mf"[i%2], 2+i)
	}
	text := printed(t, input{responses: responses, items: "item_id,max_score\nQ1,1\n"}.problems(t))
	if n := strings.Count(text, "is not a score of item Q1"); n != 100 || !strings.Contains(text, "row 101,") || !strings.Contains(text, "  and 30 more\n") {
		t.Errorf("%d printed, want 100:\n%s", n, text)
	}
}
