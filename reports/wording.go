package reports

import (
	"fmt"
	"strings"

	"difaudit/dif"
)

// reasonShort names a no-verdict reason in a table cell.
var reasonShort = map[string]string{
	dif.ReasonKeyMissing:         "key missing",
	dif.ReasonNotPresented:       "not presented",
	dif.ReasonNoVariation:        "no variation",
	dif.ReasonNoVariationInGroup: "one group has no variation",
	dif.ReasonNoScoreOverlap:     "no overlap in scores",
	dif.ReasonTooFewCandidates:   "too few candidates",
	dif.ReasonTooFewInformative:  "too few informative candidates",
	dif.ReasonNotEstimable:       "not estimable",
	dif.ReasonNotConverged:       "not converged",
	dif.ReasonWithheldForPrivacy: "withheld for privacy",
}

// reasonSentence explains a no-verdict reason to a reader without statistics.
func reasonSentence(reason string, c dif.Criteria) string {
	switch reason {
	case dif.ReasonKeyMissing:
		return "The item has no scoring key, so no answer to it could be counted as right or wrong."
	case dif.ReasonNotPresented:
		return "One of the two groups has no scored answer to the item."
	case dif.ReasonNoVariation:
		return "Every candidate got the same score on the item, so there is nothing to compare."
	case dif.ReasonNoVariationInGroup:
		return "Within one group every candidate got the same score on the item; a comparison of this kind cannot be made."
	case dif.ReasonNoScoreOverlap:
		return "No matching score was reached by candidates of both groups."
	case dif.ReasonTooFewCandidates:
		return fmt.Sprintf("Fewer candidates could be matched than the programme's policy asks for (%s in the smaller group, %s together).", whole(c.MinSmallerGroup), whole(c.MinTotal))
	case dif.ReasonTooFewInformative:
		return "Fewer than 20 candidates stand at matching scores where both groups are present and answers differ."
	case dif.ReasonNotEstimable:
		return "The size of the difference has no finite estimate; the technical cause stands beside it."
	case dif.ReasonNotConverged:
		return "The fit of the model did not settle on an answer."
	case dif.ReasonWithheldForPrivacy:
		return "Fewer than 10 candidates of a group answered the item, or could be matched on it; its results are kept back to protect them."
	}
	return spoken(reason) + "."
}

func shortReason(reason string) string {
	if s, ok := reasonShort[reason]; ok {
		return s
	}
	return spoken(reason)
}

// spoken turns a code without wording into words.
func spoken(code string) string { return strings.ReplaceAll(code, "_", " ") }

var detailWords = map[string]string{
	dif.DetailNoKey:               "no key",
	dif.DetailNoResponses:         "no scored answers in a group",
	dif.DetailInfiniteOddsRatio:   "the odds ratio is zero or infinite",
	dif.DetailNoInformativeStrata: "no matching score shows both groups and different answers",
	dif.DetailMethodNotAvailable:  "no classifying method for items of this kind in this version",
	dif.DetailNoClassifyingMethod: "the plan asks for no method that gives a letter",
}

func detailText(detail *string) string {
	if detail == nil {
		return ""
	}
	if s, ok := detailWords[*detail]; ok {
		return s
	}
	return spoken(*detail)
}

// warningSentences explain the warnings on findings; messages of single findings differ
// in detail, and one sentence serves all items of a list.
var warningSentences = map[string]string{
	dif.WarnDirectionWithoutLimit: "All differences point one way, so the odds ratio is zero or infinite and no finite D-DIF exists. The chi-square and P-DIF still hold.",
	dif.WarnLargeNotExcluded:      "Letter A, but the 95 % interval reaches -1.5 or 1.5 or beyond: with these numbers a large difference cannot be ruled out.",
	dif.WarnNonUniform:            "Non-uniform: the difference between the groups changes with the matching score (trend test, p < 0.05). The average over scores can hide it.",
	dif.WarnBreslowDaySparse:      "Few candidates at each matching score: the Breslow-Day and Tarone statistics are unreliable and are left out of this report.",
	dif.WarnFocalUnmatched:        "More than 10 % of the focal candidates stand at scores nobody of the reference group reached, and do not count here.",
	dif.WarnLetterDependsOnTest:   "The letter is another one under the other form of the chi-square (with or without continuity correction).",
	dif.WarnVeryEasy:              "More than 95 % of a group answered right. D-DIF exaggerates on so easy an item; read P-DIF beside it.",
	dif.WarnLowItemRest:           "The item hardly goes along with the rest of the test in a group (item-rest correlation below 0.10).",
	dif.WarnNegativeItemRest:      "The item runs against the rest of the test in a group. Check key and scoring first.",
}

// warningSentence falls back to the message, then the code, where a code has no wording.
func warningSentence(w dif.Warning) string {
	if s, ok := warningSentences[w.Code]; ok {
		return s
	}
	return warningMessage(w)
}

// warningMessage prefers the message of the warning, which holds its numbers.
func warningMessage(w dif.Warning) string {
	if w.Message != "" {
		return w.Message
	}
	if s, ok := comparisonWarnings[w.Code]; ok {
		return s
	}
	if s, ok := warningSentences[w.Code]; ok {
		return s
	}
	return spoken(w.Code) + "."
}

// comparisonWarnings stand in for messages that are kept back.
var comparisonWarnings = map[string]string{
	dif.WarnCandidatesLost:       "Many candidates of a group have no counterpart in the other and leave the analysis.",
	dif.WarnFocalLost:            "Many focal candidates have no counterpart in the reference group.",
	dif.WarnLowReliability:       "The matching score is not very reliable.",
	dif.WarnLargeGroupDifference: "The groups differ much in the matching score.",
	dif.WarnPurificationRefused:  "The matching score was not refined: too few items would have stayed in it.",
	dif.WarnNotStated:            "More candidates stated no label than the smaller group holds.",
	dif.WarnSetsPooled:           "Not everybody was presented the same items, and all were matched on one total.",
	dif.WarnUnscoredItems:        "Some items have no key and do not count in the matching score.",
}

// shortNote names a warning below a table.
func shortNote(code string) string {
	if code == dif.WarnNonUniform {
		return "non-uniform"
	}
	return spoken(code)
}

func exclusionWords(reason string) string {
	switch reason {
	case dif.ExcludedExactDuplicate:
		return "exact copy of another record"
	case dif.ExcludedOtherAttempt:
		return "another attempt of a candidate already counted"
	case dif.ExcludedNoExternalScore:
		return "no external score to be matched on"
	}
	return spoken(reason)
}

// severity returns A, B or C for a letter of either scale, or 0 for none.
func severity(class string) byte {
	if class == "" {
		return 0
	}
	return class[0]
}

func direction(class string) string {
	switch {
	case strings.HasSuffix(class, "-"):
		return "harder for the focal group"
	case strings.HasSuffix(class, "+"):
		return "easier for the focal group"
	}
	return ""
}

func value(s *string) string {
	if s == nil {
		return ""
	}
	return *s
}

// consequence says what the criteria make of a letter.
func consequence(letter string) string {
	switch severity(letter) {
	case 'C':
		return "By the criteria this is a large difference (C), which calls for a review of the item."
	case 'B':
		return "By the criteria this is a moderate difference (B), to be weighed where the item is used."
	}
	return ""
}

// matchingWords explains the matching variable.
func matchingWords(variable string) string {
	switch variable {
	case dif.MatchTotal:
		return "the total score on the scored operational items, the item under study included"
	case dif.MatchTotalWithinForm:
		return "the total score within the form taken, the item under study included"
	case dif.MatchTotalWithinSet:
		return "the total score within the set of items a candidate was presented, the item under study included"
	case dif.MatchExternal:
		return "an external score supplied with the data"
	case dif.MatchAuto:
		return "the total score; within the set of items presented where candidates saw different items"
	}
	return spoken(variable)
}

func levelWords(levels string) string {
	switch levels {
	case dif.LevelsThin:
		return "every score is a level of its own"
	case dif.LevelsThick:
		return "adjacent scores are joined into broad levels"
	}
	return spoken(levels)
}

func purificationWords(p string) string {
	switch p {
	case dif.PurifyNone:
		return "All items stay in the matching score, whatever their result."
	case dif.PurifyTwoStage:
		return "Two stages: items classed C in a first pass leave the matching score, and every item is tested again; an item always counts in its own test (Holland & Thayer 1988)."
	case dif.PurifyIterative:
		return "Repeated passes: items classed C leave the matching score until the same items leave twice."
	}
	return spoken(p) + "."
}

func emptyWords(m dif.MissingRule) string {
	switch m.Empty {
	case dif.EmptyNotPresented:
		return "An empty cell means that the item was not presented."
	case dif.EmptyOmitted:
		return "An empty cell is an omitted answer."
	case dif.EmptyByPosition:
		return "An empty cell with a later answer is an omitted answer; empty cells at the end were not reached."
	}
	return "The plan declares no meaning of an empty cell."
}

func attemptWords(a string) string {
	switch a {
	case dif.AttemptsFirst:
		return "the first attempt of every candidate"
	case dif.AttemptsLast:
		return "the last attempt of every candidate"
	case dif.AttemptsAll:
		return "all attempts of every candidate"
	}
	return spoken(a)
}

// list joins words with commas, cut to a number with the rest counted.
func list(words []string, most int) string {
	if len(words) > most {
		return strings.Join(words[:most], ", ") + fmt.Sprintf(" and %s more", whole(len(words)-most))
	}
	return strings.Join(words, ", ")
}
