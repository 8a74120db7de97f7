package dif

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
)

// Schema names the form of the evidence document.
const Schema = "difaudit/evidence/1"

// EngineVersion is the version of the statistics; it changes whenever a number could.
const EngineVersion = "0.1.0"

// Evidence is the outcome of an audit, complete enough to check and redo it. It is
// internal: it holds small cells. A pointer to a number is nil where the value does
// not exist; no value is NaN or infinite.
type Evidence struct {
	Schema      string       `json:"schema"`
	Engine      Engine       `json:"engine"`
	Inputs      Inputs       `json:"inputs"`
	Plan        Plan         `json:"plan"`
	Comparisons []Comparison `json:"comparisons"`
	// Notice says who may read the document.
	Notice string `json:"notice"`
}

// Engine names the program that computed the evidence.
type Engine struct {
	Version string `json:"version"`
}

// Inputs describes the data of the audit.
type Inputs struct {
	DataSHA256         string        `json:"data_sha256"` // over the canonical data, not over file bytes
	Sources            []Source      `json:"sources"`
	CandidatesReceived int           `json:"candidates_received"`
	CandidatesAnalysed int           `json:"candidates_analysed"`
	Exclusions         []Exclusion   `json:"exclusions"`
	Items              []ItemSummary `json:"items"`
	Warnings           []Warning     `json:"warnings"`
	// Groupings counts the analysed candidates by label, for every grouping that is compared.
	Groupings []GroupingCount `json:"groupings"`
}

// GroupingCount counts the analysed candidates of one grouping, plain or crossed.
type GroupingCount struct {
	Grouping  string       `json:"grouping"`
	Labels    []LabelCount `json:"labels"` // every label seen, sorted
	NotStated int          `json:"not_stated"`
}

// LabelCount is the number of analysed candidates with one label.
type LabelCount struct {
	Label string `json:"label"`
	N     int    `json:"n"`
}

// ItemSummary names an item of the audit.
type ItemSummary struct {
	Item     string `json:"item"`
	Version  string `json:"version"`
	Role     string `json:"role"`
	MaxScore int    `json:"max_score"`
	Content  string `json:"content_area,omitempty"`
}

// Comparison holds everything found for one reference and one focal group.
type Comparison struct {
	Grouping  string    `json:"grouping"`
	Reference string    `json:"reference"`
	Focal     string    `json:"focal"`
	Groups    Groups    `json:"groups"`
	Matching  Matching  `json:"matching"`
	Summary   Summary   `json:"summary"`
	Warnings  []Warning `json:"warnings"`
	Items     []Finding `json:"items"`
}

// Groups describes the two groups on the stage-1 matching score.
type Groups struct {
	Reference  Group    `json:"reference"`
	Focal      Group    `json:"focal"`
	Difference *float64 `json:"standardized_mean_difference"` // (focal - reference) / pooled SD
	NotStated  int      `json:"not_stated"`                   // candidates without a stated label of this grouping
}

// Group describes one group on the stage-1 matching score; SD has divisor n-1.
type Group struct {
	N         int      `json:"n"` // candidates with the label and a matching score
	Mean      *float64 `json:"mean"`
	SD        *float64 `json:"sd"`
	Unmatched int      `json:"unmatched"`     // of N, at matching levels that hold nobody of the other group
	NoScore   int      `json:"without_score"` // with the label and without the external score they were to be matched on; not in N
}

// Matching describes how candidates were matched.
type Matching struct {
	Variable     string         `json:"variable"`
	Levels       string         `json:"levels"`
	Reliability  *float64       `json:"reliability"` // coefficient alpha of the stage-1 score, both groups pooled
	RemovedItems []string       `json:"removed_items"`
	Stages       []Stage        `json:"stages"`
	Sets         []PresentedSet `json:"sets,omitempty"` // where candidates are matched within the set presented, or the form
	// ScoreCorrelation is the correlation of an external score with the total of the
	// scored items, over both groups; nil for another matching variable.
	ScoreCorrelation *float64 `json:"score_correlation,omitempty"`
}

// PresentedSet is one set of items that candidates of the comparison were presented.
type PresentedSet struct {
	Set        int     `json:"set"` // the number strata refer to
	Form       *string `json:"form"`
	Items      int     `json:"items"`
	NReference int     `json:"n_reference"`
	NFocal     int     `json:"n_focal"`
}

// Stage is one pass of purification: the items left out of the matching score and
// what each item gave under it.
type Stage struct {
	Stage        int         `json:"stage"`
	RemovedItems []string    `json:"removed_items"`
	Items        []StageItem `json:"items"`
}

// StageItem is the result of one item in one stage.
type StageItem struct {
	Item          string   `json:"item"`
	ChiSquare     *float64 `json:"chi_square"`
	PValue        *float64 `json:"p_value"`
	Delta         *float64 `json:"delta"`
	DeltaSE       *float64 `json:"delta_se"`
	ComputedClass *string  `json:"computed_class"`
	Detail        *string  `json:"detail"`
}

// Summary counts the findings of a comparison.
type Summary struct {
	Classes                    Counts         `json:"classes"`
	NoVerdict                  Counts         `json:"no_verdict"`
	LargeDifferenceNotExcluded int            `json:"large_difference_not_excluded"`
	ExpectedByChance           ExpectedChance `json:"expected_by_chance"`
}

// ExpectedChance is what would be flagged if no item differed: letters among the
// items that have a class, and p-values below class_alpha among all tests.
type ExpectedChance struct {
	BOrC        float64 `json:"b_or_c"`
	C           float64 `json:"c"`
	Tests       int     `json:"tests"`
	Significant float64 `json:"significant"`
}

// Count is a name and how often it occurred.
type Count struct {
	Name string
	N    int
}

// Counts is an ordered list of counts, written as a JSON object in that order.
type Counts []Count

// Of returns the count of a name, 0 where it does not stand in the list.
func (c Counts) Of(name string) int {
	for _, e := range c {
		if e.Name == name {
			return e.N
		}
	}
	return 0
}

// Total returns the sum of the counts.
func (c Counts) Total() int {
	t := 0
	for _, e := range c {
		t += e.N
	}
	return t
}

// MarshalJSON writes the counts as an object in their order.
func (c Counts) MarshalJSON() ([]byte, error) {
	var b bytes.Buffer
	b.WriteByte('{')
	for i, e := range c {
		if i > 0 {
			b.WriteByte(',')
		}
		fmt.Fprintf(&b, "%q:%d", e.Name, e.N)
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// UnmarshalJSON reads an object of counts, keeping its order.
func (c *Counts) UnmarshalJSON(data []byte) error {
	*c = Counts{}
	dec := json.NewDecoder(bytes.NewReader(data))
	if t, err := dec.Token(); err != nil || t != json.Delim('{') {
		return fmt.Errorf("counts: not an object")
	}
	for dec.More() {
		name, err := dec.Token()
		if err != nil {
			return err
		}
		var n int
		if err := dec.Decode(&n); err != nil {
			return err
		}
		*c = append(*c, Count{name.(string), n})
	}
	return nil
}

// Finding is the outcome for one item in one comparison.
type Finding struct {
	FindingCounts
	Results        Results // by method, in report order
	Classification Classification
	Warnings       []Warning
	FindingExtras
}

// FindingCounts are the sample sizes and plain item statistics of a finding.
// NReference and NFocal have a label, a matching score and a scored response; the
// matched ones stand in strata that hold both groups.
type FindingCounts struct {
	Item              string           `json:"item"`
	Version           string           `json:"version"`
	NReference        int              `json:"n_reference"`
	NFocal            int              `json:"n_focal"`
	NMatchedReference int              `json:"n_matched_reference"`
	NMatchedFocal     int              `json:"n_matched_focal"`
	StrataUsed        int              `json:"strata_used"`
	StrataInformative int              `json:"strata_informative"`
	PReference        *float64         `json:"p_reference"` // mean score / maximum score
	PFocal            *float64         `json:"p_focal"`
	ItemRest          ItemRest         `json:"item_rest_correlation"`
	Strata            []StratumSummary `json:"strata"`
}

// FindingExtras are further plain statistics, written after the named keys of a finding.
type FindingExtras struct {
	NInformative        int      `json:"n_informative"`        // candidates in informative strata, both groups
	DifficultyReference *float64 `json:"difficulty_reference"` // normal delta 13 + 4z of a binary item
	DifficultyFocal     *float64 `json:"difficulty_focal"`
}

// ItemRest holds Pearson correlations of the item with the stage-1 score less the item.
type ItemRest struct {
	Reference *float64 `json:"reference"`
	Focal     *float64 `json:"focal"`
}

// StratumSummary is one comparable stratum of the reported stage.
type StratumSummary struct {
	Score         float64 `json:"score"`
	NReference    int     `json:"n_reference"`
	MeanReference float64 `json:"mean_reference"`
	NFocal        int     `json:"n_focal"`
	MeanFocal     float64 `json:"mean_focal"`
	Set           int     `json:"set,omitempty"`
}

// Classification is the letter of a finding, or why there is none.
type Classification struct {
	Class            *string  `json:"class"`
	ComputedClass    *string  `json:"computed_class"`
	Basis            *string  `json:"basis"` // mantel_haenszel, polytomous or likelihood_ratio
	PValue           *float64 `json:"p_value"`
	Reason           *string  `json:"reason"`
	Detail           *string  `json:"detail"`
	ClassIfCorrected *string  `json:"class_if_corrected"`
}

// Results holds the outcome of each method that was asked for and applies.
type Results []MethodResult

// MethodResult is a result under the id of its method.
type MethodResult struct {
	Method string
	Result Result
}

// Of returns the result of the method, or nil.
func (r Results) Of(id string) Result {
	for _, m := range r {
		if m.Method == id {
			return m.Result
		}
	}
	return nil
}

// MantelHaenszel returns the Mantel-Haenszel result, or nil.
func (f *Finding) MantelHaenszel() *MantelHaenszelResult {
	r, _ := f.Results.Of(idMantelHaenszel).(*MantelHaenszelResult)
	return r
}

// BreslowDay returns the result on homogeneity of the odds ratio, or nil.
func (f *Finding) BreslowDay() *BreslowDayResult {
	r, _ := f.Results.Of(idBreslowDay).(*BreslowDayResult)
	return r
}

// Standardization returns the standardized difference, or nil.
func (f *Finding) Standardization() *StandardizationResult {
	r, _ := f.Results.Of(idStandardization).(*StandardizationResult)
	return r
}

// MarshalJSON writes the finding as one object: counts, a key per method,
// classification, warnings, then the extras.
func (f Finding) MarshalJSON() ([]byte, error) {
	head, err := plainJSON(f.FindingCounts)
	if err != nil {
		return nil, err
	}
	b := bytes.NewBuffer(head[:len(head)-1])
	part := func(key string, v any) error {
		j, err := plainJSON(v)
		if err != nil {
			return fmt.Errorf("%s: %w", key, err)
		}
		fmt.Fprintf(b, ",%q:%s", key, j)
		return nil
	}
	for _, m := range f.Results {
		if err := part(m.Method, m.Result); err != nil {
			return nil, err
		}
	}
	if err := errors.Join(part("classification", f.Classification), part("warnings", f.Warnings)); err != nil {
		return nil, err
	}
	tail, err := plainJSON(f.FindingExtras)
	if err != nil {
		return nil, err
	}
	b.WriteByte(',')
	b.Write(tail[1:])
	return b.Bytes(), nil
}

// plainJSON marshals without escaping for HTML, as Encode does.
func plainJSON(v any) ([]byte, error) {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetEscapeHTML(false)
	if err := enc.Encode(v); err != nil {
		return nil, err
	}
	return bytes.TrimSuffix(b.Bytes(), []byte("\n")), nil
}

// UnmarshalJSON reads a finding; a key of no known method is an error.
func (f *Finding) UnmarshalJSON(data []byte) error {
	if err := errors.Join(json.Unmarshal(data, &f.FindingCounts), json.Unmarshal(data, &f.FindingExtras)); err != nil {
		return err
	}
	var keys map[string]json.RawMessage
	if err := json.Unmarshal(data, &keys); err != nil {
		return err
	}
	f.Results = nil
	for _, m := range Methods() {
		if raw, ok := keys[m.ID()]; ok {
			r := m.New()
			if err := strictUnmarshal(raw, r); err != nil {
				return fmt.Errorf("%s: %w", m.ID(), err)
			}
			f.Results = append(f.Results, MethodResult{m.ID(), r})
			delete(keys, m.ID())
		}
	}
	if err := strictUnmarshal(keys["classification"], &f.Classification); err != nil {
		return fmt.Errorf("classification: %w", err)
	}
	if err := json.Unmarshal(keys["warnings"], &f.Warnings); err != nil {
		return fmt.Errorf("warnings: %w", err)
	}
	for _, part := range []any{f.FindingCounts, f.FindingExtras} {
		j, err := json.Marshal(part)
		if err != nil {
			return err
		}
		var named map[string]json.RawMessage
		if err := json.Unmarshal(j, &named); err != nil {
			return err
		}
		for key := range named {
			delete(keys, key)
		}
	}
	delete(keys, "classification")
	delete(keys, "warnings")
	for key := range keys {
		return fmt.Errorf("unknown key %q", key)
	}
	return nil
}

func strictUnmarshal(data []byte, v any) error {
	dec := json.NewDecoder(bytes.NewReader(data))
	dec.DisallowUnknownFields()
	return dec.Decode(v)
}

// Encode returns the canonical bytes of the evidence: one JSON document, keys in the
// documented order, numbers in shortest round-trip form, a final line feed.
func (e *Evidence) Encode() ([]byte, error) {
	var b bytes.Buffer
	enc := json.NewEncoder(&b)
	enc.SetEscapeHTML(false)
	if err := enc.Encode(e); err != nil {
		return nil, fmt.Errorf("encode evidence: %w", err)
	}
	return b.Bytes(), nil
}

// DecodeEvidence reads evidence from its bytes. Unknown keys and another schema are errors.
func DecodeEvidence(data []byte) (*Evidence, error) {
	var head struct {
		Schema string `json:"schema"`
	}
	if err := json.Unmarshal(data, &head); err != nil {
		return nil, fmt.Errorf("this is not an evidence document (%w)", err)
	}
	if head.Schema != Schema {
		return nil, fmt.Errorf("read evidence: schema is %q, this program reads %q", head.Schema, Schema)
	}
	var e Evidence
	if err := strictUnmarshal(data, &e); err != nil {
		return nil, fmt.Errorf("read evidence: %w", err)
	}
	return &e, nil
}

// number returns a pointer to x, or nil where x is not finite.
func number(x float64) *float64 {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return nil
	}
	return &x
}

func text(s string) *string { return &s }

// FitFailed reports whether a fit failed somewhere: an item not converged, separated or
// with a singular information matrix.
func (e *Evidence) FitFailed() bool {
	for i := range e.Comparisons {
		for j := range e.Comparisons[i].Items {
			k := &e.Comparisons[i].Items[j].Classification
			if k.Reason != nil && *k.Reason == ReasonNotConverged {
				return true
			}
			if k.Detail != nil && (*k.Detail == "separation" || *k.Detail == "singular_information") {
				return true
			}
		}
	}
	return false
}
