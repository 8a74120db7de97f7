package intake

import (
	"fmt"
	"strings"
	"testing"
)

func TestNotesListLabels(t *testing.T) {
	t.Parallel()
	responses := "candidate_id,sex,Q1\na,m,1\nb,f,0\nc,\"f\x1b[31m\",0\nd,,1\n"
	for i := range 60 {
		responses += fmt.Sprintf("e%02d,z%02d,1\nf%02d,z%02d,1\n", i, i, i, i)
	}
	notes := strings.Join(input{responses: responses}.good(t).Notes, "\n")
	for _, words := range []string{`grouping sex: f 1, "f\x1b[31m" 1, m 1, z00 2, z01 2`, "z46 2, 13 more labels with 26 candidates, not stated 1\n"} {
		if !strings.Contains(notes, words) {
			t.Errorf("notes lack %q:\n%s", words, notes)
		}
	}
	if strings.Contains(notes, "\x1b") {
		t.Error("a control character reaches the terminal")
	}
}

func TestNotesCountOne(t *testing.T) {
	t.Parallel()
	notes := strings.Join(input{
		responses: "candidate_id,sex,attempt,Q1\na,m,1,1\na,m,1,1\nb,f,1,0\nb,f,2,0\n",
	}.good(t).Notes, "\n")
	if want := "4 received, 1 exact copy collapsed (3 left), 1 other attempt left out (2 left), 2 to be analysed"; !strings.Contains(notes, want) {
		t.Errorf("notes lack %q:\n%s", want, notes)
	}
}
