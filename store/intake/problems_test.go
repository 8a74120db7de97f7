package intake

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"strings"
	"testing"

	"difaudit/dif"
)

const (
	fourRows  = "candidate_id,sex,Q1,Q2\na,m,1,0\nb,f,0,1\nc,m,1,1\nd,f,0,0\n"
	twoItems  = "item_id,max_score\nQ1,1\nQ2,1\n"
	keyed     = "item_id,key,options\nQ1,A,A|B|C|D\nQ2,B,4\n"
	keyedRows = "candidate_id,sex,Q1,Q2\na,m,A,B\nb,f,C,D\n"
)

// long1001 is one byte longer than a name may be.
var long1001 = strings.Repeat("z", 1001)

func zipped(text string) string {
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	z.Write([]byte(text))
	z.Close()
	return b.String()
}

func emptyIs(value string) func(*dif.Plan) {
	return func(p *dif.Plan) { p.Missing.Empty = value }
}

// manyChoices has 251 different answers to one item.
func manyChoices() string {
	var b strings.Builder
	b.WriteString("candidate_id,sex,Q1\n")
	for i := range 251 {
		fmt.Fprintf(&b, "%03d,%c,x%d\n", i, "mf"[i%2], i)
	}
	return b.String()
}

var problemCases = []struct {
	kind   string
	input  input
	file   string
	row    int
	column string
	words  string // must stand in the message
}{
	{emptyFile, input{responses: "\xEF\xBB\xBF"}, "responses.csv", 0, "", "needs a header row"},
	{binaryContent, input{responses: "PK\x03\x04rest"}, "responses.csv", 0, "", "save the sheet as CSV"},
	{binaryContent, input{responses: "candidate_id,sex,Q1\na,m,\x00\n"}, "responses.csv", 0, "", "zero bytes"},
	{badEncoding, input{responses: "\xFF\xFEc\x00a\x00"}, "responses.csv", 0, "", "save it as UTF-8"},
	{badEncoding, input{responses: "candidate_id,sex,Q1\na,m,1\nb,f\xE9,0\n"}, "responses.csv", 3, "sex", "save the file as UTF-8"},
	{badEncoding, input{responses: "candidate_id,sex,Q1\na\xE9,m,1\nb,f,0\n"}, "responses.csv", 2, "candidate_id", "save the file as UTF-8"},
	{badEncoding, input{responses: keyedRows + "c,m,\xE9,A\n", items: keyed}, "responses.csv", 4, "Q1", "save the file as UTF-8"},
	{badLineEnds, input{responses: "candidate_id,sex,Q1\ra,m,1\rb,f,0\r"}, "responses.csv", 1, "", "line feeds"},
	{endlessLine, input{responses: "candidate_id,sex,Q1\na,m,\"" + strings.Repeat("1", 3<<20)}, "responses.csv", 2, "", "unclosed quotation mark"},
	{unreadableGzip, input{responses: zipped(fourRows)[:40]}, "responses.csv", 0, "", "send it again"},
	{gzipRatio, input{responses: zipped(fourRows + strings.Repeat("e,f,0,0\n", 3<<20))}, "responses.csv", 0, "", "send it unpacked"},
	{badQuoting, input{responses: fourRows + "e,\"m\"x,1,1\n"}, "responses.csv", 6, "", "those after it were not read"},
	{badQuoting, input{responses: "candidate_id,se\"x,Q1\na,m,1\n"}, "responses.csv", 1, "", "Without its header"},
	{badQuoting, input{responses: fourRows + "e,m\"x,1,1\n"}, "responses.csv", 6, "", "This row was not read"},
	{tooLarge, input{responses: "candidate_id" + strings.Repeat(",x", 10_000) + "\n"}, "responses.csv", 1, "", "10000 is the limit"},
	{noHeader, input{responses: "a,m,1,0\nb,f,0,1\n"}, "responses.csv", 1, "", "candidate_id, item_id and response"},
	{noHeader, input{responses: "a,m,1,1\nb,f,0,1\n", items: "item_id,max_score\n1,1\n2,1\n"}, "responses.csv", 1, "", "looks like data"},
	{noHeader, input{responses: "candidate_id|sex|Q1\na|m|1\n"}, "responses.csv", 1, "", "comma, semicolon or tab"},
	{noHeader, input{responses: fourRows, items: "Q1,A\nQ2,B\n"}, "items.csv", 1, "", "item_id is required"},
	{noHeader, input{responses: fourRows, forms: "F,1,Q1\nF,2,Q2\n"}, "forms.csv", 1, "", "the first three are required"},
	{noHeader, input{responses: fourRows, candidates: "a,m\nb,f\n"}, "candidates.csv", 1, "", "one column per grouping"},
	{duplicateColumn, input{responses: "candidate_id,sex,Q1,Q1\na,m,1,1\nb,f,0,1\n"}, "responses.csv", 1, "Q1", "columns 3 and 4"},
	{unnamedColumn, input{responses: "candidate_id,sex,Q1,\na,m,1,\nb,f,0,7\n"}, "responses.csv", 3, "4", "name or remove it"},
	{missingColumn, input{responses: "id,sex,Q1\na,m,1\n"}, "responses.csv", 1, "candidate_id", "first row must hold the names"},
	{missingColumn, input{responses: fourRows, items: "item,key\nQ1,A\n"}, "items.csv", 1, "item_id", "no column item_id"},
	{undeclaredColumn, input{responses: "candidate_id,sex,Q1,town\na,m,1,0\nb,f,0,north\n"}, "responses.csv", 3, "town", "--groupings or --ignore"},
	{undeclaredColumn, input{responses: fourRows, items: "item_id,max_score,colour\nQ1,1,x\nQ2,1,x\n"}, "items.csv", 1, "colour", "rename or remove"},
	{undeclaredColumn, input{responses: fourRows, items: "item_id\nQ1\n"}, "responses.csv", 1, "Q2", "add the item there"},
	{undeclaredColumn, input{responses: "candidate_id,item_id,response,note\na,Q1,1,x\nb,Q1,1,x\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 1, "note", "--ignore"},
	{raggedRow, input{responses: fourRows + "e,m,1\n"}, "responses.csv", 6, "", "3 fields and the header 4"},
	{repeatedHeader, input{responses: fourRows + "candidate_id,sex,Q1,Q2\ne,m,1,1\n"}, "responses.csv", 6, "", "remove it"},
	{noRows, input{responses: fourRows, items: "item_id,key\n"}, "items.csv", 0, "", "one row per item"},
	{noRows, input{responses: fourRows, forms: "form,position,item_id\n"}, "forms.csv", 0, "", "one row per form and item"},
	{noRows, input{responses: fourRows, candidates: "candidate_id,sex\n"}, "candidates.csv", 0, "", "one row per candidate"},
	{noCandidates, input{responses: "candidate_id,sex,Q1\n"}, "responses.csv", 0, "", "no row below it"},
	{noItems, input{responses: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 1, "", "no column holds answers"},
	{badValue, input{responses: fourRows, items: "item_id,max_score\nQ1,300\nQ2,1\n"}, "items.csv", 2, "max_score", "0 to 249"},
	{badValue, input{responses: fourRows + long1001 + ",m,1,1\n"}, "responses.csv", 6, "candidate_id", "longer than 1,000 bytes"},
	{badValue, input{responses: fourRows + "e," + long1001 + ",1,1\n"}, "responses.csv", 6, "sex", "longer than 1,000 bytes"},
	{badValue, input{responses: "candidate_id,sex,form,Q1\na,m,F,1\nb,f," + long1001 + ",1\n"}, "responses.csv", 3, "form", "longer than 1,000 bytes"},
	{badValue, input{responses: "candidate_id,sex,Q1," + long1001 + "\na,m,1,1\nb,f,0,1\n"}, "responses.csv", 1, "4", "longer than 1,000 bytes"},
	{badValue, input{responses: keyedRows + "c,m," + long1001 + ",A\n", items: "item_id,key\nQ1,A\nQ2,B\n"}, "responses.csv", 4, "Q1", "longer than 1,000 bytes"},
	{badValue, input{responses: keyedRows + "c,m," + long1001 + ",A\n", items: "item_id,key\nQ1,\nQ2,B\n"}, "responses.csv", 4, "Q1", "longer than 1,000 bytes"},
	{badValue, input{responses: "candidate_id,item_id,response\na,Q1,1\nb," + long1001 + ",1\nb,Q1,1\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 3, "item_id", "longer than 1,000 bytes"},
	{badValue, input{responses: fourRows, items: twoItems + long1001 + ",1\n"}, "items.csv", 4, "item_id", "longer than 1,000 bytes"},
	{badValue, input{responses: keyedRows, items: "item_id,options\nQ1,A|" + long1001 + "\nQ2,4\n"}, "items.csv", 2, "options", "longer than 1,000 bytes"},
	{badValue, input{responses: fourRows, forms: "form,position,item_id\nF,1,Q1\nF,2,Q2\n" + long1001 + ",1,Q1\n"}, "forms.csv", 4, "form", "longer than 1,000 bytes"},
	{badValue, input{responses: fourRows, candidates: "candidate_id,sex\na,m\nb,f\nc,m\nd,f\n" + long1001 + ",f\n"}, "candidates.csv", 6, "candidate_id", "longer than 1,000 bytes"},
	{badValue, input{responses: fourRows, items: "item_id,role\nQ1,anchor\nQ2,\n"}, "items.csv", 2, "role", "operational, pretest or linking"},
	{badValue, input{responses: fourRows, items: "item_id,options\nQ1,99\nQ2,\n"}, "items.csv", 2, "options", "2 to 26"},
	{badValue, input{responses: fourRows, items: "item_id,key\nQ1,A||B\nQ2,B\n"}, "items.csv", 2, "key", "empty part"},
	{badValue, input{responses: fourRows, items: "item_id,key,max_score\nQ1,A,2\nQ2,B,1\n"}, "items.csv", 2, "max_score", "set max_score to 1"},
	{badValue, input{responses: fourRows, forms: "form,position,item_id\nF,first,Q1\nF,2,Q2\n"}, "forms.csv", 2, "position", "whole number"},
	{emptyCandidateID, input{responses: fourRows + " ,m,1,1\n"}, "responses.csv", 6, "candidate_id", "give one or remove the row"},
	{valueOutOfRange, input{responses: keyedRows + "c,m,E,A\n", items: keyed}, "responses.csv", 4, "Q1", `"E" is not an option`},
	{valueOutOfRange, input{responses: "candidate_id,sex,Q1,Q2\na,m,1,0\nb,f,2,1\n", items: twoItems}, "responses.csv", 3, "Q1", `"2" is not a score of item Q1 (whole numbers 0 to 1)`},
	{valueOutOfRange, input{responses: "candidate_id,sex,Q1,Q2\na,m,1.0,0\nb,f,0,1\n", items: twoItems}, "responses.csv", 2, "Q1", "write it as 1"},
	{valueOutOfRange, input{responses: "candidate_id,sex,Q1,Q2\na,m," + strings.Repeat("y", 60) + ",0\nb,f,0,1\n", items: twoItems}, "responses.csv", 2, "Q1", `"` + strings.Repeat("y", 40) + `" (cut)`},
	{valueOutOfRange, input{responses: "candidate_id,sex,attempt,Q1\na,m,one,1\nb,f,1,0\n"}, "responses.csv", 2, "attempt", "whole number"},
	{valueOutOfRange, input{responses: "candidate_id,sex,external_score,Q1\na,m,NaN,1\nb,f,1,0\n"}, "responses.csv", 2, "external_score", "not a number"},
	{valueOutOfRange, input{responses: "candidate_id,item_id,response\na,Q1,1\nb,Q1,11\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 3, "response", "0 to 10"},
	{tooManyChoices, input{responses: manyChoices(), items: "item_id,key\nQ1,x1\n"}, "responses.csv", 252, "Q1", "declare its options"},
	{valueOutOfRange, input{responses: "candidate_id,sex,Q1,Q2\na,m,1,1\nb,f,x,0\nc,m,0,1\n", items: "item_id\nQ1\nQ2\n"}, "responses.csv", 3, "Q1", `"x" is not a score of item Q1`},
	{valueOutOfRange, input{responses: "candidate_id,item_id,response\na,Q1,1\nb,Q2,1\na,Q2,3.0\nb,Q1,0\n", items: "item_id\nQ1\nQ2\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 4, "response", "write it as 3"},
	{undeclaredBlanks, input{responses: "candidate_id,sex,Q1,Q2\na,m,1,0\nb,f,,1\n"}, "responses.csv", 3, "", "does not say what that means"},
	{positionUnknown, input{responses: "candidate_id,item_id,response\na,Q1,1\na,Q2,1\nb,Q1,0\n", candidates: "candidate_id,sex\na,m\nb,f\n", plan: emptyIs("by_position")}, "responses.csv", 0, "", "--empty not_presented"},
	{answerOffForm, input{responses: "candidate_id,sex,form,Q1,Q2\na,m,F,1,1\nb,f,G,0,1\n", forms: "form,position,item_id\nF,1,Q1\nG,1,Q1\nG,2,Q2\n"}, "responses.csv", 2, "Q2", "correct the form of the row"},
	{answerOffForm, input{responses: "candidate_id,form,item_id,response\na,F,Q1,1\na,F,Q2,1\nb,G,Q2,1\nb,G,Q1,1\n", candidates: "candidate_id,sex\na,m\nb,f\n", forms: "form,position,item_id\nF,1,Q1\nG,1,Q1\nG,2,Q2\n"}, "responses.csv", 3, "Q2", "correct the form of the row"},
	{unknownItem, input{responses: fourRows, items: twoItems, forms: "form,position,item_id\nF,1,Q1\nF,2,Q9\n"}, "forms.csv", 3, "item_id", "Q9 is not in the items file"},
	{unknownItem, input{responses: fourRows, items: twoItems, forms: "form,position,item_id,version\nF,1,Q1,2\nF,2,Q2,1\n"}, "forms.csv", 2, "version", "not this version"},
	{unknownItem, input{responses: fourRows, forms: "form,position,item_id\nF,1,Q1\nF,2,Q9\n"}, "forms.csv", 3, "item_id", "no column for item Q9"},
	{unknownItem, input{responses: "candidate_id,item_id,response\na,Q1,1\nb,Q3,1\n", items: twoItems, candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 3, "item_id", "Q3 is not in the items file"},
	{unknownForm, input{responses: "candidate_id,sex,form,Q1\na,m,F,1\nb,f,H,1\n", forms: "form,position,item_id\nF,1,Q1\nG,1,Q1\n"}, "responses.csv", 3, "form", "not in the forms file"},
	{formMissing, input{responses: "candidate_id,sex,form,Q1\na,m,F,1\nb,f,,1\n"}, "responses.csv", 3, "form", "--ignore form"},
	{formColumnMissing, input{responses: fourRows, forms: "form,position,item_id\nF,1,Q1\nG,1,Q2\n"}, "responses.csv", 1, "form", "add the column"},
	{formDiffers, input{responses: "candidate_id,form,item_id,response\na,F,Q1,1\na,G,Q2,1\nb,F,Q1,0\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 3, "form", "row 2 gives this candidate another form"},
	{versionAmbiguous, input{responses: fourRows, items: "item_id,version,max_score\nQ1,1,1\nQ1,2,1\nQ2,1,1\n"}, "responses.csv", 1, "Q1", "2 versions"},
	{versionAmbiguous, input{responses: fourRows, items: "item_id,version,max_score\nQ1,1,1\nQ1,2,1\nQ2,1,1\n", forms: "form,position,item_id\nF,1,Q1\nF,2,Q2\n"}, "forms.csv", 2, "version", "say which one"},
	{duplicateOnForm, input{responses: fourRows, forms: "form,position,item_id\nF,1,Q1\nF,1,Q2\n"}, "forms.csv", 3, "position", "row 2 has the same form and position"},
	{duplicateOnForm, input{responses: fourRows, forms: "form,position,item_id\nF,1,Q1\nF,2,Q1\nF,3,Q2\n"}, "forms.csv", 3, "item_id", "row 2 has the same item"},
	{conflictingItem, input{responses: fourRows, items: "item_id,max_score\nQ1,1\nQ2,1\nQ2,2\n"}, "items.csv", 4, "Q2", "row 3 describes this item and version differently"},
	{keyContradictory, input{responses: keyedRows, items: keyed + "Q1,B,A|B|C|D\n"}, "items.csv", 4, "Q1", "row 2 has another key"},
	{keyContradictory, input{responses: "candidate_id,sex,form,Q1,Q2\na,m,F,A,B\nb,f,G,C,D\n", items: "item_id,options\nQ1,4\nQ2,4\n", forms: "form,position,item_id,key\nF,1,Q1,A\nF,2,Q2,B\nG,1,Q1,A\nG,2,Q2,D\n"}, "forms.csv", 5, "Q2", "forms.csv, row 3"},
	{keyNotAnOption, input{responses: keyedRows, items: "item_id,key,options\nQ1,E,A|B|C|D\nQ2,B,4\n"}, "items.csv", 2, "key", `"E", which is not among its options`},
	{keyNotAnOption, input{responses: keyedRows, items: keyed, forms: "form,position,item_id,key\nF,1,Q1,A\nF,2,Q2,E\n"}, "forms.csv", 3, "key", "correct the key or the options"},
	{optionOrderWrong, input{responses: keyedRows, items: keyed, forms: "form,position,item_id,option_order\nF,1,Q1,A|B|C|C\nF,2,Q2,\n"}, "forms.csv", 2, "option_order", "name each once"},
	{optionOrderWrong, input{responses: keyedRows, items: keyed, forms: "form,position,item_id,option_order\nF,1,Q1,A|B|C\nF,2,Q2,\n"}, "forms.csv", 2, "option_order", "each option of item Q1 once"},
	{conflictingResponse, input{responses: "candidate_id,item_id,response\na,Q1,1\nb,Q1,1\na,Q1,0\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 4, "response", "keep one of them"},
	{conflictingResponse, input{responses: "candidate_id,item_id,response\na,Q1,\nb,Q1,1\na,Q1,0\n", candidates: "candidate_id,sex\na,m\nb,f\n", plan: emptyIs("omitted")}, "responses.csv", 4, "response", "keep one of them"},
	{conflictingDuplicate, input{responses: fourRows + "b,f,1,1\n"}, "responses.csv", 3, "", "rows 3, 6 hold the same candidate"},
	{undeclaredLabel, input{responses: fourRows + "e,7,1,1\n", plan: func(p *dif.Plan) {
		p.Groupings = map[string]dif.GroupingRule{"sex": {Labels: []string{"m", "f"}}}
	}}, "responses.csv", 6, "sex", "groupings.sex.labels"},
	{severalLabels, input{responses: fourRows + "e,m;f,1,1\n"}, "responses.csv", 6, "sex", "groupings.sex.several"},
	{severalLabels, input{responses: "candidate_id,sex,attempt,Q1\na,m,1,1\nb,f,1,0\na,f,2,1\n"}, "responses.csv", 4, "sex", "first response row is 2"},
	{severalLabels, input{responses: fourRows, candidates: "candidate_id,sex\na,m\nb,f\nc,m\nd,f\na,f\n"}, "candidates.csv", 6, "sex", "row 2 gives the same candidate another label"},
	{severalLabels, input{responses: fourRows, candidates: "candidate_id,sex\na,f\nb,f\nc,m\nd,f\n"}, "responses.csv", 2, "sex", "differ between its rows or files"},
	{missingGrouping, input{responses: fourRows, plan: func(p *dif.Plan) { p.Comparisons[0].Grouping = "gender"; p.Columns.Ignore = []string{"sex"} }}, "responses.csv", 0, "gender", "sex"},
	{labelNotInData, input{responses: fourRows, plan: func(p *dif.Plan) { p.Comparisons[0].Focal = "w" }}, "responses.csv", 0, "sex", `focal label "w"`},
	{labelNotInData, input{responses: "candidate_id,sex,Q1\na,m,1\nb,m,0\n", plan: func(p *dif.Plan) { p.Comparisons[0].Focal = "each" }}, "responses.csv", 0, "sex", "no focal group"},
	{externalScoreMissing, input{responses: fourRows, plan: func(p *dif.Plan) { p.Matching.Variable = "external" }}, "responses.csv", 1, "external_score", "matching.variable"},

	{exactDuplicate, input{responses: fourRows + "b,f,0,1\n"}, "responses.csv", 6, "", "exact copy of row 3"},
	{duplicateResponse, input{responses: "candidate_id,item_id,response\na,Q1,1\nb,Q1,1\na,Q1,1\n", candidates: "candidate_id,sex\na,m\nb,f\n"}, "responses.csv", 4, "response", "the same answer"},
	{duplicateItemRow, input{responses: fourRows, items: twoItems + "Q2,1\n"}, "items.csv", 4, "Q2", "row 3 is the same"},
	{duplicateCandidateRow, input{responses: fourRows, candidates: "candidate_id,sex\na,m\nb,f\nc,m\nd,f\na,m\n"}, "candidates.csv", 6, "", "row 2 describes the same candidate"},
	{noCandidateRow, input{responses: fourRows, candidates: "candidate_id,sex\na,m\nb,f\nc,m\n"}, "responses.csv", 5, "", "Add the row"},
	{emptyLabel, input{responses: fourRows + "e,,1,1\n"}, "responses.csv", 6, "sex", "not stated"},
	{identifiersEndInZeros, input{responses: "candidate_id,sex,Q1\n1.23457E+15,m,1\n2,f,0\n"}, "responses.csv", 0, "candidate_id", "as text"},
	{identifiersLostZeros, input{responses: "candidate_id,sex,Q1\n98765,m,1\n54321,f,0\n24680,m,1\n13579,f,1\n77,f,1\n"}, "responses.csv", 0, "candidate_id", "leading zeros"},
	{identifiersMixedLength, input{responses: "candidate_id,sex,Q1\n98765,m,1\n5432,f,0\n246801,m,1\n"}, "responses.csv", 0, "candidate_id", "3 different lengths"},
	{keyMissing, input{responses: "candidate_id,sex,Q1,Q2\na,m,1,3\nb,f,4,1\n", items: "item_id,key,options\nQ1,1,1|2|3|4\nQ2,,\n"}, "items.csv", 3, "Q2", "Give the key, or max_score if these are scores"},
	{keyMissing, input{responses: keyedRows, items: "item_id,key,options\nQ1,A,4\nQ2,,4\n"}, "items.csv", 3, "Q2", "until its key is given"},
	{choiceWithoutKey, input{responses: keyedRows, items: "item_id,key,options\nQ1,A,4\nQ2,,\n"}, "responses.csv", 2, "Q2", "2 answers"},
	{scoreAssumed, input{responses: "candidate_id,sex,Q1,Q2\na,m,A,1\nb,f,C,3\n", items: "item_id,key,options\nQ1,A,4\nQ2,,\n"}, "items.csv", 3, "Q2", "Declare max_score"},
	{itemColumnAbsent, input{responses: fourRows, items: twoItems + "Q3,1\n"}, "responses.csv", 0, "Q3", "not presented to anybody"},
	{codeIsOption, input{responses: fourRows, items: "item_id,max_score\nQ1,1\nQ2,9\n", plan: func(p *dif.Plan) { p.Missing.Omitted = []string{"9"} }}, "items.csv", 3, "Q2", "read as missing"},
	{keyOptionMismatch, input{responses: keyedRows, items: keyed, forms: "form,position,item_id,key,option_order\nF,1,Q1,B,B|A|C|D\nF,2,Q2,A,D|B|A|C\n"}, "forms.csv", 3, "Q2", "check the key and the order"},
	{missingCodeOffForm, input{responses: "candidate_id,sex,form,Q1,Q2\na,m,F,1,8\nb,f,G,0,1\n", forms: "form,position,item_id\nF,1,Q1\nG,1,Q1\nG,2,Q2\n", plan: func(p *dif.Plan) { p.Missing.Omitted = []string{"8"} }}, "responses.csv", 2, "Q2", "counts as not presented"},
}

func TestProblems(t *testing.T) {
	t.Parallel()
	for i, c := range problemCases {
		t.Run(fmt.Sprintf("%s/%d", c.kind, i), func(t *testing.T) {
			t.Parallel()
			p := c.input.problems(t)
			if p.Count(c.kind) == 0 {
				t.Fatalf("not reported; got:\n%s", printed(t, p))
			}
			o := p.kind(c.kind).Occurrences[0]
			if o.File != c.file || o.Row != c.row || o.Column != c.column {
				t.Errorf("at %s, row %d, column %q; want %s, row %d, column %q", o.File, o.Row, o.Column, c.file, c.row, c.column)
			}
			if strings.Contains(printed(t, p), "zzz") {
				t.Error("an endless name is printed")
			}
			if !strings.Contains(o.Message, c.words) {
				t.Errorf("message %q lacks %q", o.Message, c.words)
			}
			if len(p.Kinds) > 1 {
				for _, k := range p.Kinds {
					if k.Kind != c.kind && k.Severity == Error {
						t.Errorf("reported besides: %s", k.Kind)
					}
				}
			}
		})
	}
}

func printed(t *testing.T, p *Problems) string {
	t.Helper()
	var b strings.Builder
	if err := p.Print(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// Every kind has a case above or a test of its own.
func TestEveryKindIsTested(t *testing.T) {
	t.Parallel()
	tested := map[string]bool{
		gzipTooLarge:  true, // TestGzipTooLarge
		tooManyLabels: true, // TestTooManyLabels
	}
	for _, c := range problemCases {
		tested[c.kind] = true
	}
	for _, k := range kinds {
		if !tested[k.code] {
			t.Errorf("no test for %s", k.code)
		}
	}
}

// All problems of all files come together, and identifiers and labels stay out of
// the text.
func TestAllProblemsAtOnce(t *testing.T) {
	t.Parallel()
	in := input{
		responses:  "candidate_id,sex,form,Q1,Q2\nsecret-1,m,F,A,B\nsecret-2,f,H,E,\nsecret-2,hidden,F,A,B\n,f,F,A,B\nsecret-3,m;f,F,A\n",
		items:      keyed + "Q1,B,4\n",
		forms:      "form,position,item_id\nF,1,Q1\nF,1,Q2\nG,1,Q7\n",
		candidates: "candidate_id,sex\nsecret-1,f\nsecret-4,m\nsecret-4,f\n",
	}
	p := in.problems(t)
	for _, kind := range []string{keyContradictory, duplicateOnForm, unknownItem, severalLabels, unknownForm, valueOutOfRange, emptyCandidateID, raggedRow} {
		if p.Count(kind) == 0 {
			t.Errorf("%s is not reported", kind)
		}
	}
	text := printed(t, p) + p.Error()
	for _, hidden := range []string{"secret", "hidden"} {
		if strings.Contains(text, hidden) {
			t.Errorf("%q stands in the text:\n%s", hidden, text)
		}
	}
	for i := 1; i < len(p.Kinds); i++ {
		if p.Kinds[i-1].Severity == Warning && p.Kinds[i].Severity == Error {
			t.Error("an error stands behind a warning")
		}
	}
}

func TestOccurrencesAreCappedAndCounted(t *testing.T) {
	t.Parallel()
	p := input{responses: fourRows + strings.Repeat(",m,1,1\n", 250)}.problems(t)
	k := p.kind(emptyCandidateID)
	if k.Count != 250 || len(k.Occurrences) != maxOccurrences {
		t.Errorf("%d counted, %d kept; want 250, %d", k.Count, len(k.Occurrences), maxOccurrences)
	}
	if !strings.Contains(printed(t, p), "and 150 more") {
		t.Errorf("the printed text does not say how many more:\n%s", printed(t, p))
	}
}

func TestGzipTooLarge(t *testing.T) {
	before := maxUnpacked
	maxUnpacked = 64
	defer func() { maxUnpacked = before }()
	p := input{responses: zipped(fourRows + fourRows)}.problems(t)
	if p.Count(gzipTooLarge) != 1 {
		t.Errorf("got:\n%s", printed(t, p))
	}
}

func TestTooManyLabels(t *testing.T) {
	t.Parallel()
	var b strings.Builder
	b.WriteString("candidate_id,sex,Q1\n")
	for i := range maxLabels + 2 {
		fmt.Fprintf(&b, "%d,%d,1\n", i, i)
	}
	if p := (input{responses: b.String()}).problems(t); p.Count(tooManyLabels) != 2 {
		t.Errorf("counted %d, want 2", p.Count(tooManyLabels))
	}
}
