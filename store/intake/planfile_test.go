package intake

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"difaudit/dif"
)

const minimalPlan = "comparisons:\n  - {grouping: sex, reference: m, focal: f}\n"

func TestReadPlan(t *testing.T) {
	t.Parallel()
	want := dif.DefaultPlan()
	want.Comparisons = []dif.PlannedComparison{{Grouping: "sex", Reference: "m", Focal: "f"}}
	got, err := ReadPlan("plan.yaml", strings.NewReader(minimalPlan))
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Errorf("defaults are lost:\n%s", diff)
	}

	full := `# a comment
title: "Spring audit"
comparisons:
  - grouping: country
    reference: no        # stays the text no
    focal: 01
  - grouping: sex+home
    reference: m+y
    focal: each
groupings:
  country:
    labels: [no, 01, 1.0]
    not_stated: ["", x]
    several: not_stated
columns: {groupings: [region], ignore: [note, "e-mail"]}
methods: [mantel_haenszel]
matching: {variable: total, levels: thin, purification: none}
missing:
  empty: by_position
  omitted: [8, .]
  not_reached: [9]
  invalid: ["*"]
  technical: [T]
  not_presented: [N]
attempts: last
criteria:
  name: our policy
  class_alpha: 0.01
  continuity_correction: true
  min_smaller_group: 100
  min_total: 300
  false_discovery: 0.1
seed: -7
`
	wantFull := dif.Plan{
		Title:       "Spring audit",
		Comparisons: []dif.PlannedComparison{{Grouping: "country", Reference: "no", Focal: "01"}, {Grouping: "sex+home", Reference: "m+y", Focal: "each"}},
		Groupings:   map[string]dif.GroupingRule{"country": {Labels: []string{"no", "01", "1.0"}, NotStated: []string{"", "x"}, Several: "not_stated"}},
		Columns:     dif.Columns{Groupings: []string{"region"}, Ignore: []string{"note", "e-mail"}},
		Methods:     []string{"mantel_haenszel"},
		Matching:    dif.MatchingRule{Variable: "total", Levels: "thin", Purification: "none"},
		Missing:     dif.MissingRule{Empty: "by_position", Omitted: []string{"8", "."}, NotReached: []string{"9"}, Invalid: []string{"*"}, Technical: []string{"T"}, NotPresented: []string{"N"}},
		Attempts:    "last",
		Criteria:    dif.Criteria{Name: "our policy", ClassAlpha: 0.01, ContinuityCorrection: true, MinSmallerGroup: 100, MinTotal: 300, FalseDiscovery: 0.1},
		Seed:        -7,
	}
	asJSON := `{"title": "Spring audit", "comparisons": [
	{"grouping": "country", "reference": "no", "focal": "01"}, {"grouping": "sex+home", "reference": "m+y", "focal": "each"}],
	"groupings": {"country": {"labels": ["no", "01", 1.0], "not_stated": ["", "x"], "several": "not_stated"}},
	"columns": {"groupings": ["region"], "ignore": ["note", "e-mail"]}, "methods": ["mantel_haenszel"],
	"matching": {"variable": "total", "levels": "thin", "purification": "none"},
	"missing": {"empty": "by_position", "omitted": [8, "."], "not_reached": ["9"], "invalid": ["*"], "technical": ["T"], "not_presented": ["N"]},
	"attempts": "last", "criteria": {"name": "our policy", "class_alpha": 1e-2, "continuity_correction": true,
	"min_smaller_group": 100, "min_total": 300, "false_discovery": 0.1}, "seed": -7}`
	for name, text := range map[string]string{
		"YAML": full, "JSON": asJSON, "CRLF": strings.ReplaceAll(full, "\n", "\r\n"), "byte order mark": "\xEF\xBB\xBF" + full,
	} {
		got, err := ReadPlan("plan", strings.NewReader(text))
		if err != nil {
			t.Errorf("%s: %v", name, err)
		} else if diff := cmp.Diff(wantFull, got); diff != "" {
			t.Errorf("%s (-want +got):\n%s", name, diff)
		}
	}
	for _, all := range []string{"methods: all\n", "methods: [all]\n"} {
		if _, err := ReadPlan("plan.yaml", strings.NewReader(minimalPlan+all)); err != nil {
			t.Errorf("%s: %v", all, err)
		}
	}
	if _, err := ReadPlan("plan.yaml", strings.NewReader("{comparisons: [{grouping: sex, reference: m, focal: f}]}")); err != nil {
		t.Errorf("braces in YAML: %v", err)
	}
}

// Brackets and dashes within text and comments nest nothing.
func TestBracketsInText(t *testing.T) {
	t.Parallel()
	many := strings.Repeat("[{", 30) + strings.Repeat("- ", 30)
	for name, title := range map[string]string{
		"double quotes": `"` + many + `\" [` + `"`, "single quotes": "'" + many + "'' ['", "plain": "see " + many, "comment": "x # " + many,
		"block": "|\n  " + many + "\n", "two lines": "\"" + many + "\n  " + many + "\"",
	} {
		plan, err := ReadPlan("plan.yaml", strings.NewReader("# "+many+"\n"+minimalPlan+"missing: {omitted: [-, \"[\", '{', 9]}\ntitle: "+title+"\n"))
		if err != nil || name != "comment" && !strings.Contains(plan.Title, strings.TrimSpace(many)) {
			t.Errorf("%s: title %q, %v", name, plan.Title, err)
		}
		if diff := cmp.Diff([]string{"-", "[", "{", "9"}, plan.Missing.Omitted); err == nil && diff != "" {
			t.Errorf("%s: %s", name, diff)
		}
	}
}

func TestReadPlanFaults(t *testing.T) {
	t.Parallel()
	for name, c := range map[string]struct{ text, words string }{
		"unknown key":                    {minimalPlan + "colour: red\n", "plan.yaml, line 3: the plan has no key colour"},
		"unknown inner key":              {minimalPlan + "missing:\n  omited: [9]\n", "line 4: missing has no key omited"},
		"unknown key in list":            {"comparisons:\n  - grouping: sex\n    reference: m\n    focus: f\n", "line 4: comparisons[1] has no key focus"},
		"repeated key":                   {minimalPlan + "seed: 1\nseed: 2\n", "line 4: the key seed stands here and in line 3"},
		"repeated key in JSON":           {"{\"seed\": 1,\n\"seed\": 2}", "line 2: the key seed stands here and in line 1"},
		"unknown key in JSON":            {"{\"seed\": 1,\n\n\"sed\": 2}", "line 3: the plan has no key sed"},
		"irt":                            {minimalPlan + "irt:\n  model: 2pl\n", "line 3: irt: item response models are not part of this version"},
		"anchor":                         {"title: &t x\n" + minimalPlan, "line 1: anchors and aliases"},
		"alias":                          {minimalPlan + "title: *t\n", "line 3: anchors and aliases"},
		"merge":                          {minimalPlan + "criteria:\n  <<: {name: x}\n", "line 4"},
		"tag":                            {minimalPlan + "title: !!str 7\n", "line 3: tags"},
		"two documents":                  {minimalPlan + "---\n" + minimalPlan, "a second document"},
		"empty":                          {"", "the plan is empty"},
		"only a comment":                 {"# nothing\n", "the plan is empty"},
		"a list":                         {"- a\n- b\n", "holds keys with values"},
		"broken YAML":                    {"comparisons: [\n", "not valid YAML"},
		"open quotation mark":            {minimalPlan + "title: \"x\n", "not valid YAML"},
		"broken JSON":                    {"{\"seed\": 1,\n", "not valid JSON"},
		"two JSON documents":             {"{\"seed\": 1}\n{}", "something follows the plan"},
		"no value":                       {minimalPlan + "title:\n", "line 3: title has no value"},
		"text for a list":                {minimalPlan + "missing: {omitted: 9}\n", "line 3: missing.omitted is a list"},
		"list for a text":                {minimalPlan + "title: [a]\n", "line 3: title is a single value"},
		"text for a number":              {minimalPlan + "criteria: {min_total: many}\n", "line 3: criteria.min_total is a whole number"},
		"text for truth":                 {minimalPlan + "criteria: {continuity_correction: yes}\n", "criteria.continuity_correction is true or false"},
		"not a number":                   {minimalPlan + "criteria: {class_alpha: .nan}\n", "line 3: criteria.class_alpha"},
		"a value refused":                {minimalPlan + "matching:\n  variable: totals\n", "line 4: matching.variable: \"totals\" is not a value"},
		"a value of later":               {minimalPlan + "matching:\n  levels: thick\n", "line 4: matching.levels: thick is not part of this version"},
		"a method of later":              {minimalPlan + "methods: [logistic]\n", "line 3: methods: logistic is not part of this version"},
		"a comparison refused":           {minimalPlan + "  - {grouping: sex, reference: m, focal: m}\n", "line 3: comparisons[2]: reference and focal must be different"},
		"no comparison":                  {"seed: 3\n", "comparisons: name at least one"},
		"too long":                       {minimalPlan + strings.Repeat("#", 1<<20), "longer than 1 MiB"},
		"many lines":                     {strings.Repeat("-\n", 500_000), "the limit"},
		"many keys":                      {"{" + strings.Repeat("k: 1, ", 15_000) + "}", "the key k stands here"},
		"nested deep":                    {"title: " + strings.Repeat("[", 10_000), "nests deeper"},
		"nested in flow and dashes":      {"title: [" + strings.Repeat("- ", 30), "nests deeper"},
		"nested behind a quotation mark": {"title: a \" b\nseed: " + strings.Repeat("[", 30) + "\"", "nests deeper"},
		"many brackets":                  {"title: " + strings.Repeat("[", 100_000), "the limit"},
		"nested deep in JSON":            {"{\"title\": " + strings.Repeat("[", 100_000), "nests deeper"},
		"nested deep by dashes":          {strings.Repeat("- ", 10_000), "nests deeper"},
	} {
		_, err := ReadPlan("plan.yaml", strings.NewReader(c.text))
		if err == nil || !strings.Contains(err.Error(), c.words) || !strings.HasPrefix(err.Error(), "plan.yaml") {
			t.Errorf("%s: got %v; want %q", name, err, c.words)
		}
	}
	var keys strings.Builder
	for i := range 10_000 {
		fmt.Fprintf(&keys, "%d: 1,", i)
	}
	if _, err := ReadPlan("plan.yaml", strings.NewReader("{"+keys.String()+"}")); err == nil || !strings.Contains(err.Error(), "more than 5000 keys") {
		t.Errorf("many keys: %.200v", err)
	}
	_, err := ReadPlan("plan.yaml", strings.NewReader("a: 1\nb: 2\n"+minimalPlan+"seed: x\n"))
	if err == nil || strings.Count(err.Error(), "\n") != 2 {
		t.Errorf("three faults are not told together: %v", err)
	}
}
