package reports

import (
	"bytes"
	"encoding/csv"
	"strconv"
	"strings"
	"testing"

	"difaudit/dif"
	"github.com/google/go-cmp/cmp"
)

func TestHarmless(t *testing.T) {
	t.Parallel()
	for in, want := range map[string]string{
		"=1+1": "'=1+1", "+1+1": "'+1+1", "-cmd": "'-cmd", "@SUM(A1)": "'@SUM(A1)", "\tx": "'\tx", "\rx": "'\rx", " =1": "' =1", "＝1": "'＝1",
		"-1.5": "-1.5", "+3": "+3", "-2.5e-10": "-2.5e-10", "-": "'-", "-.": "'-.", "-1e": "'-1e", "-Inf": "'-Inf", "+0x10": "'+0x10", "--1": "'--1",
		"A": "A", "C-": "C-", "": "", "a=b": "a=b", "\xff": "\uFFFD", "<10": "<10",
	} {
		if got := harmless(in); got != want {
			t.Errorf("harmless(%q) = %q, want %q", in, got, want)
		}
	}
}

func readCSV(t testing.TB, e *dif.Evidence) ([]string, []map[string]string) {
	t.Helper()
	var b bytes.Buffer
	if err := WriteCSV(&b, e); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []map[string]string
	for _, row := range rows[1:] {
		m := map[string]string{}
		for i, cell := range row {
			m[rows[0][i]] = cell
		}
		out = append(out, m)
	}
	return rows[0], out
}

func TestCSVHoldsEveryValueOfEveryMethod(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	header, rows := readCSV(t, e)
	if len(rows) != 24 {
		t.Fatalf("%d rows, want 24", len(rows))
	}
	for i := range e.Comparisons[0].Items {
		f := &e.Comparisons[0].Items[i]
		for _, m := range f.Results {
			for _, c := range m.Result.Columns() {
				got := rows[i][m.Method+"."+c.Key]
				if c.Value == nil {
					if got != "" {
						t.Errorf("%s %s.%s is %q, want nothing", f.Item, m.Method, c.Key, got)
					}
					continue
				}
				if x, err := strconv.ParseFloat(got, 64); err != nil || x != *c.Value {
					t.Errorf("%s %s.%s is %q, want %v", f.Item, m.Method, c.Key, got, *c.Value)
				}
			}
		}
		if got := rows[i]["computed_class"]; got != value(f.Classification.ComputedClass) {
			t.Errorf("%s: computed_class %q", f.Item, got)
		}
	}
	e.Comparisons[0].Items = e.Comparisons[0].Items[:0]
	if again, _ := readCSV(t, e); cmp.Diff(header, again) != "" {
		t.Error("the header depends on the findings")
	}
}

// CV-22 of methods.md, pass 2, computed there by other means on the same data: D-DIF, SE and
// letter under the score without S2WantShout and S2DoCurse, printed to five decimals.
func TestCSVAgainstPublishedCheckValues(t *testing.T) {
	t.Parallel()
	_, rows := readCSV(t, verbal(t, nil))
	for _, want := range []struct {
		item, class string
		delta, se   float64
	}{
		{"S2WantCurse", "B-", -1.73910, 0.90476}, {"S2WantShout", "B-", -2.26327, 0.78000}, {"S4WantShout", "B-", -1.90912, 0.87599},
		{"S2DoCurse", "B+", 2.32404, 0.97318}, {"S2DoScold", "B+", 2.14833, 0.82089}, {"S3DoCurse", "C+", 2.31767, 0.77852}, {"S3DoScold", "B+", 1.95718, 0.83634},
	} {
		for _, row := range rows {
			if row["item"] != want.item {
				continue
			}
			delta, _ := strconv.ParseFloat(row["mantel_haenszel.delta"], 64)
			se, _ := strconv.ParseFloat(row["mantel_haenszel.delta_se"], 64)
			if !(abs(delta-want.delta) <= 0.5e-5 && abs(se-want.se) <= 0.5e-5) || row["computed_class"] != want.class {
				t.Errorf("%s: %v (%v) %s, want %v (%v) %s", want.item, delta, se, row["computed_class"], want.delta, want.se, want.class)
			}
			if row["class"] != "" || row["reason"] != dif.ReasonTooFewCandidates { // 243 and 73 candidates are below 200 and 500
				t.Errorf("%s: class %q, reason %q", want.item, row["class"], row["reason"])
			}
		}
	}
}

func abs(x float64) float64 { return max(x, -x) }

func TestCSVDisarmsNames(t *testing.T) {
	t.Parallel()
	e := verbal(t, nil)
	e.Comparisons[0].Grouping = "@gender"
	e.Comparisons[0].Items[0].Item = `=HYPERLINK("x","y")`
	e.Comparisons[0].Items[1].Item = "-7"
	e.Comparisons[0].Items[2].Item = "a,\"b\"\nc"
	_, rows := readCSV(t, e)
	for i, want := range []string{`'=HYPERLINK("x","y")`, "-7", "a,\"b\"\nc"} {
		if got := rows[i]["item"]; got != want {
			t.Errorf("item %q, want %q", got, want)
		}
	}
	if got := rows[0]["grouping"]; got != "'@gender" {
		t.Errorf("grouping %q", got)
	}
	if strings.Contains(rows[3]["mantel_haenszel.delta"], "'") {
		t.Error("a negative number was taken for text")
	}
}
