package intake

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"strings"
	"testing"
	"testing/iotest"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"difaudit/dif"
)

// content is everything of the data that does not depend on how the files look.
type content struct {
	Items      []dif.Item
	Forms      []dif.Form
	Groupings  []dif.Grouping
	IDs, Rows  []string
	FormOf     []uint16
	Attempt    []int32
	External   []float64
	Exclusions []dif.Exclusion
	Warnings   []dif.Warning
	Received   int
}

func contentOf(d *dif.Data) content {
	return content{
		d.Items, d.Forms, d.Groupings, ids(d), rows(d), d.FormOf, d.Attempt, d.External, d.Exclusions, d.Warnings, d.Received,
	}
}

func differ(t *testing.T, what string, want, got *dif.Data) {
	t.Helper()
	if diff := cmp.Diff(contentOf(want), contentOf(got), cmpopts.EquateNaNs(), cmpopts.EquateEmpty()); diff != "" {
		t.Errorf("%s differs (-want +got):\n%s", what, diff)
	}
}

func TestWideFile(t *testing.T) {
	t.Parallel()
	in := input{
		responses: "candidate_id,sex,Q2,external_score,Q1,note\nb,f,3,1.5,1,x y\na,m,0,,1,\nc,,9,-2,0,z\n",
		plan: func(p *dif.Plan) {
			p.Columns.Ignore = []string{"note"}
			p.Missing.Omitted = []string{"9"}
		},
	}
	result := in.good(t)
	d := result.Data
	if diff := cmp.Diff([]string{"01", "31", "o0"}, rows(d)); diff != "" {
		t.Error(diff)
	}
	want := []dif.Item{
		{ID: "Q2", Version: "1", Role: "operational", MaxScore: 3},
		{ID: "Q1", Version: "1", Role: "operational", MaxScore: 1},
	}
	if diff := cmp.Diff(want, d.Items); diff != "" {
		t.Error(diff)
	}
	groups := []dif.Grouping{{Name: "sex", Labels: []string{"f", "m"}, Codes: []uint16{2, 1, 0}}}
	if diff := cmp.Diff(groups, d.Groupings); diff != "" {
		t.Error(diff)
	}
	if !(d.External[0] != d.External[0]) || d.External[1] != 1.5 || d.External[2] != -2 {
		t.Errorf("external scores %v", d.External)
	}
	if len(d.Warnings) != 1 || d.Warnings[0].Code != emptyLabel || d.Warnings[0].Message != "fewer than 10 candidates without a stated label of the grouping sex" {
		t.Errorf("warnings %v", d.Warnings)
	}
	notes := strings.Join(result.Notes, "\n")
	for _, words := range []string{"taken as items: 1 item (max 3): Q2; 1 item (max 1): Q1", "grouping sex: f 1, m 1, not stated 1", "not used: note", "3 received, 3 to be analysed"} {
		if !strings.Contains(notes, words) {
			t.Errorf("notes lack %q:\n%s", words, notes)
		}
	}
}

// The same answers in other clothes give the same data.
func TestFormatsGiveEqualData(t *testing.T) {
	t.Parallel()
	plain := input{responses: fourRows}.good(t).Data
	semicolons := strings.ReplaceAll(fourRows, ",", ";")
	for name, text := range map[string]string{
		"byte order mark": "\xEF\xBB\xBF" + fourRows,
		"semicolons":      semicolons,
		"tabs":            strings.ReplaceAll(fourRows, ",", "\t"),
		"CRLF":            strings.ReplaceAll(fourRows, "\n", "\r\n"),
		"gzip":            zipped(fourRows),
		"two gzip parts":  zipped(fourRows[:30]) + zipped(fourRows[30:]),
		"quotes":          `"candidate_id","sex","Q1","Q2"` + "\n" + strings.ReplaceAll(fourRows[len("candidate_id,sex,Q1,Q2\n"):], ",m,", `,"m",`),
		"spaces":          "candidate_id , sex, Q1, Q2\n a ,m , 1,0 \nb, f,0,1\nc,m,1,1\nd,f, 0, 0\n",
		"blank rows":      "\n" + fourRows[:31] + "\n,,,\n" + fourRows[31:] + ",,,\n \n\n",
		"no last newline": strings.TrimSuffix(fourRows, "\n"),
		"nameless column": strings.ReplaceAll(fourRows, "\n", ",\n"),
	} {
		differ(t, name, plain, input{responses: text}.good(t).Data)
	}
	quotedName := input{
		responses: "candidate_id,sex,\"Q1\nfirst; part\",Q2\na,m,1,0\nb,f,0,1\n\"c\nd\",m,1,7\ne,f,0,x\n",
		items:     "item_id,max_score\n\"Q1\nfirst; part\",1\nQ2,1\n",
	}.problems(t)
	if o := quotedName.kind(valueOutOfRange).Occurrences; len(o) != 2 || o[0].Row != 5 || o[1].Row != 7 {
		t.Errorf("rows of %v; want the lines 5 and 7", o)
	}
}

func TestWideAndLongGiveEqualData(t *testing.T) {
	t.Parallel()
	wide := input{
		responses:  "candidate_id,attempt,form,A1,A2,A3\nc1,1,X,a,2,\nc2,1,Y,b,,99\nc1,2,Y,c,0,1\nc3,1,X,,,\n",
		items:      "item_id,key,options,max_score,content_area,role\nA1,b,,,algebra,\nA2,,,2,,pretest\nA3,,,1,,linking\n",
		forms:      "form,position,item_id\nY,2,A1\nY,1,A3\nY,3,A2\nX,1,A1\nX,2,A2\n",
		candidates: "candidate_id,sex,age\nc1,f,20\nc2,m,30\nc3,f,40\n",
		plan: func(p *dif.Plan) {
			p.Missing.Empty = dif.EmptyByPosition
			p.Missing.Technical = []string{"99"}
			p.Attempts = dif.AttemptsAll
		},
	}
	long := wide
	long.responses = "item_id,candidate_id,response,attempt,form\n" +
		"A3,c2,99,1,Y\nA1,c1,a,1,X\nA2,c1,2,1,X\nA1,c2,b,1,Y\nA3,c1,1,2,Y\nA1,c1,c,2,Y\nA2,c1,0,2,Y\nA2,c2,,1,Y\nA1,c3,,1,X\n"
	a, b := wide.good(t), long.good(t)
	differ(t, "long", a.Data, b.Data)
	// c1 took X and then Y; A3 is not on X. c2 left A2, the last of Y, blank: not reached.
	if diff := cmp.Diff([]string{"02n", "201", "1rt", "rrn"}, rows(a.Data)); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]int32{1, 2, 1, 1}, a.Data.Attempt); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]string{"a", "b", "c"}, a.Data.Items[0].Options); diff != "" {
		t.Error(diff)
	}
	joined := "candidates in both files: 3, only in responses.csv: 0, only in candidates.csv: 0"
	if notes := strings.Join(a.Notes, "\n"); !strings.Contains(notes, joined) || !strings.Contains(notes, "candidates.csv that were not used: age") {
		t.Errorf("notes:\n%s", notes)
	}
}

// Without items file, forms and attempts: items by name, absent pairs are blanks.
func TestLongFileAlone(t *testing.T) {
	t.Parallel()
	in := input{
		responses:  "candidate_id,item_id,response\nb,Z,1\na,Z,0\na,M,2\n",
		candidates: "candidate_id,sex\na,m\nb,f\n",
		plan:       emptyIs(dif.EmptyOmitted),
	}
	d := in.good(t).Data
	if diff := cmp.Diff([]string{"20", "o1"}, rows(d)); diff != "" {
		t.Error(diff)
	}
	if d.Items[0].ID != "M" || d.Items[0].MaxScore != 2 || d.Items[1].MaxScore != 1 || d.Received != 2 {
		t.Errorf("items %v, received %d", d.Items, d.Received)
	}
}

// In a long file without forms every item of the items file is on the form, also one
// that nobody answered: what its empty cells mean must be declared.
func TestLongFileWithAnItemNobodyAnswered(t *testing.T) {
	t.Parallel()
	in := input{
		responses:  "candidate_id,item_id,response\na,Q1,1\nb,Q1,0\n",
		items:      "item_id,max_score\nQ1,1\nQ2,1\n",
		candidates: "candidate_id,sex\na,m\nb,f\n",
	}
	if p := in.problems(t); p.Count(undeclaredBlanks) != 2 || p.Count(itemColumnAbsent) != 0 {
		t.Errorf("got:\n%s", printed(t, p))
	}
	for empty, want := range map[string][]string{
		dif.EmptyNotPresented: {"1n", "0n"}, dif.EmptyOmitted: {"1o", "0o"}, dif.EmptyByPosition: {"1r", "0r"},
	} {
		in.plan = emptyIs(empty)
		if diff := cmp.Diff(want, rows(in.good(t).Data)); diff != "" {
			t.Errorf("%s: %s", empty, diff)
		}
	}
	in.plan = emptyIs(dif.EmptyOmitted)
	in.forms = "form,position,item_id\nF,1,Q1\n"
	result := in.good(t)
	if diff := cmp.Diff([]string{"1n", "0n"}, rows(result.Data)); diff != "" || len(result.Problems.Kinds) != 0 {
		t.Errorf("not on the form: %s\n%s", diff, printed(t, result.Problems))
	}
	in.items, in.forms = "item_id,version,max_score\nQ1,1,1\nQ2,old,1\nQ2,new,1\n", ""
	if p := in.problems(t); p.Count(versionAmbiguous) != 1 {
		t.Errorf("versions that no form tells apart; got:\n%s", printed(t, p))
	}
}

// A long file whose items and candidates come in any order, over several blocks.
func TestLongFileInAnyOrder(t *testing.T) {
	t.Parallel()
	const candidates, items = 700, 40
	score := func(c, i int) int { return (c*c + 3*i) % 4 }
	var lines []string
	var wide strings.Builder
	wide.WriteString("candidate_id,sex")
	for i := range items {
		fmt.Fprintf(&wide, ",Q%02d", i)
	}
	people := "candidate_id,sex\n"
	for c := range candidates {
		sex := string("mf"[c%2])
		fmt.Fprintf(&wide, "\nc%04d,%s", c, sex)
		people += fmt.Sprintf("c%04d,%s\n", c, sex)
		for i := range items {
			fmt.Fprintf(&wide, ",%d", score(c, i))
			lines = append(lines, fmt.Sprintf("c%04d,Q%02d,%d\n", c, i, score(c, i)))
		}
	}
	rng := rand.New(rand.NewPCG(3, 4))
	rng.Shuffle(len(lines), func(i, j int) { lines[i], lines[j] = lines[j], lines[i] })
	long := input{responses: "candidate_id,item_id,response\n" + strings.Join(lines, ""), candidates: people}
	differ(t, "long", input{responses: wide.String()}.good(t).Data, long.good(t).Data)
}

// The order of rows changes nothing in the data.
func TestRowOrderDoesNotMatter(t *testing.T) {
	t.Parallel()
	header := "candidate_id,sex,attempt,form,external_score,Q1,Q2,Q3\n"
	var lines []string
	for c := range 300 {
		lines = append(lines, fmt.Sprintf("%d,%s,1,%c,%d,%c,%d,%s\n", c*37%1000, []string{"m", "f", "x", ""}[c%4], "GF"[c%2], c%7, "CABD"[c*c%4], c%3, []string{"1", "", "0"}[c%3]))
		if c%10 == 0 {
			lines = append(lines, lines[len(lines)-1])
		}
		if c%11 == 0 {
			lines = append(lines, fmt.Sprintf("%d,%s,2,F,1,A,1,1\n", c*37%1000, []string{"m", "f", "x", ""}[c%4]))
		}
	}
	in := input{
		responses: header + strings.Join(lines, ""), items: "item_id,key\nQ1,A\nQ2,\nQ3,\n",
		plan: emptyIs(dif.EmptyByPosition),
	}
	want := in.good(t).Data
	rng := rand.New(rand.NewPCG(5, 6))
	for range 5 {
		rng.Shuffle(len(lines), func(i, j int) { lines[i], lines[j] = lines[j], lines[i] })
		in.responses = header + strings.Join(lines, "")
		differ(t, "shuffled file", want, in.good(t).Data)
	}
}

func TestSources(t *testing.T) {
	t.Parallel()
	in := input{responses: zipped(fourRows + "\n,,,\n"), items: twoItems, forms: "form,position,item_id\nF,1,Q1\nF,2,Q2\n", candidates: "candidate_id,age\na,1\nb,2\nc,3\nd,4\n"}
	req := in.request()
	req.Administration = "spring"
	result, err := Read(t.Context(), req)
	if err != nil {
		t.Fatal(err)
	}
	digest := func(s string) string {
		sum := sha256.Sum256([]byte(s))
		return hex.EncodeToString(sum[:])
	}
	spring := "spring"
	want := []dif.Source{
		{Administration: &spring, Kind: "responses", SHA256: digest(in.responses), Rows: 4},
		{Administration: &spring, Kind: "items", SHA256: digest(in.items), Rows: 2},
		{Administration: &spring, Kind: "forms", SHA256: digest(in.forms), Rows: 2},
		{Administration: &spring, Kind: "candidates", SHA256: digest(in.candidates), Rows: 4},
	}
	if diff := cmp.Diff(want, result.Data.Sources); diff != "" {
		t.Error(diff)
	}
	if in.good(t).Data.Sources[0].Administration != nil {
		t.Error("an administration without a name")
	}
	if f := result.Data.FormOf; len(f) != 4 || result.Data.Forms[0].ID != "F" {
		t.Errorf("forms of candidates %v, want the only form for all four", f)
	}
}

func TestFailuresOfReading(t *testing.T) {
	t.Parallel()
	req := input{responses: fourRows}.request()
	broken := errors.New("the line dropped")
	req.Responses.Reader = io.MultiReader(strings.NewReader(fourRows), iotest.ErrReader(broken))
	_, err := Read(t.Context(), req)
	var problems *Problems
	if !errors.Is(err, broken) || errors.As(err, &problems) || !strings.Contains(err.Error(), "responses.csv") {
		t.Errorf("got %v, want the failure of reading with the name of the file", err)
	}
	req = input{responses: fourRows}.request()
	req.Responses.Reader = io.MultiReader(strings.NewReader(zipped(fourRows)[:20]), iotest.ErrReader(broken))
	if _, err := Read(t.Context(), req); !errors.Is(err, broken) {
		t.Errorf("got %v, want the failure of reading", err)
	}
	ended, cancel := context.WithCancel(t.Context())
	cancel()
	var many strings.Builder
	wideFile(&many, 2*progressEvery, 2)
	if _, err := Read(ended, input{responses: many.String()}.request()); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v, want the end of the context", err)
	}
	calls := 0
	req = input{responses: many.String()}.request()
	req.Progress = func(int) { calls++ }
	if _, err := Read(t.Context(), req); err != nil || calls != 2 {
		t.Errorf("progress called %d times, want 2 (%v)", calls, err)
	}
	if _, err := Read(t.Context(), Request{}); err == nil {
		t.Error("no error without a response file")
	}
}

func TestOneByteAtATime(t *testing.T) {
	t.Parallel()
	for _, text := range []string{fourRows, zipped(fourRows)} {
		req := input{}.request()
		req.Responses.Reader = iotest.OneByteReader(strings.NewReader(text))
		result, err := Read(t.Context(), req)
		if err != nil {
			t.Fatal(err)
		}
		differ(t, "read by single bytes", input{responses: fourRows}.good(t).Data, result.Data)
	}
}
