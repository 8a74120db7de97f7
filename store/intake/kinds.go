package intake

// Codes of the kinds of problem. They are stable: programs may rely on them.
const (
	emptyFile      = "empty_file"
	binaryContent  = "binary_content"
	badEncoding    = "bad_encoding"
	badLineEnds    = "bad_line_ends"
	endlessLine    = "endless_line"
	unreadableGzip = "unreadable_gzip"
	gzipTooLarge   = "gzip_too_large"
	gzipRatio      = "gzip_ratio"
	badQuoting     = "bad_quoting"
	tooLarge       = "too_large"

	noHeader         = "no_header"
	duplicateColumn  = "duplicate_column"
	unnamedColumn    = "unnamed_column"
	missingColumn    = "missing_column"
	undeclaredColumn = "undeclared_column"
	raggedRow        = "ragged_row"
	repeatedHeader   = "repeated_header"
	noRows           = "no_rows"
	noCandidates     = "no_candidates"
	noItems          = "no_items"
	badValue         = "bad_value"

	emptyCandidateID     = "empty_candidate_id"
	valueOutOfRange      = "value_out_of_range"
	tooManyChoices       = "too_many_choices"
	undeclaredBlanks     = "undeclared_blanks"
	positionUnknown      = "position_unknown"
	answerOffForm        = "answer_off_form"
	unknownItem          = "unknown_item"
	unknownForm          = "unknown_form"
	formMissing          = "form_missing"
	formColumnMissing    = "form_column_missing"
	formDiffers          = "form_differs"
	versionAmbiguous     = "version_ambiguous"
	duplicateOnForm      = "duplicate_on_form"
	conflictingItem      = "conflicting_item"
	keyContradictory     = "key_contradictory"
	keyNotAnOption       = "key_not_an_option"
	optionOrderWrong     = "option_order_wrong"
	conflictingResponse  = "conflicting_response"
	conflictingDuplicate = "conflicting_duplicate"
	undeclaredLabel      = "undeclared_label"
	severalLabels        = "several_labels"
	tooManyLabels        = "too_many_labels"
	missingGrouping      = "missing_grouping"
	labelNotInData       = "label_not_in_data"
	externalScoreMissing = "external_score_missing"

	exactDuplicate         = "exact_duplicate"
	duplicateResponse      = "duplicate_response"
	duplicateItemRow       = "duplicate_item_row"
	duplicateCandidateRow  = "duplicate_candidate_row"
	emptyLabel             = "empty_label"
	noCandidateRow         = "no_candidate_row"
	identifiersEndInZeros  = "identifiers_end_in_zeros"
	identifiersLostZeros   = "identifiers_lost_zeros"
	identifiersMixedLength = "identifiers_mixed_length"
	keyMissing             = "key_missing"
	choiceWithoutKey       = "choice_without_key"
	scoreAssumed           = "score_assumed"
	itemColumnAbsent       = "item_column_absent"
	codeIsOption           = "code_is_option"
	keyOptionMismatch      = "key_option_mismatch"
	missingCodeOffForm     = "missing_code_off_form"
)

// kinds lists what every kind is about. Warnings stand in the order in which they
// enter the data; those of items name the items there.
var kinds = []struct {
	code     string
	severity Severity
	about    string
	one      string // the same of a single occurrence; warnings only
	items    bool   // occurrences are items
}{
	{emptyFile, Error, "files without any content", "", false},
	{binaryContent, Error, "files that are not text", "", false},
	{badEncoding, Error, "text that is not UTF-8", "", false},
	{badLineEnds, Error, "files whose lines end in a carriage return alone", "", false},
	{endlessLine, Error, "records longer than 1 MiB", "", false},
	{unreadableGzip, Error, "gzip files that cannot be unpacked", "", false},
	{gzipTooLarge, Error, "gzip files that unpack to more than 8 GiB", "", false},
	{gzipRatio, Error, "gzip files that unpack to more than 200 times their size", "", false},
	{badQuoting, Error, "quotation marks that break the rules of CSV", "", false},
	{tooLarge, Error, "more columns, items or answers than can be held", "", false},
	{noHeader, Error, "files without a header line", "", false},
	{duplicateColumn, Error, "column names that occur twice", "", false},
	{unnamedColumn, Error, "columns with values but without a name", "", false},
	{missingColumn, Error, "columns that the file must have", "", false},
	{undeclaredColumn, Error, "columns that are neither items nor declared", "", false},
	{raggedRow, Error, "rows with more or fewer fields than the header", "", false},
	{repeatedHeader, Error, "header rows in the middle of a file", "", false},
	{noRows, Error, "files with a header and no rows", "", false},
	{noCandidates, Error, "response files without candidates", "", false},
	{noItems, Error, "response files without items", "", false},
	{badValue, Error, "cells whose value cannot be used", "", false},
	{emptyCandidateID, Error, "rows without a candidate identifier", "", false},
	{valueOutOfRange, Error, "cells outside the values of their column", "", false},
	{tooManyChoices, Error, "items with more than 250 different choices", "", false},
	{undeclaredBlanks, Error, "empty item cells whose meaning is not declared", "", false},
	{positionUnknown, Error, "blanks judged by position without an order of items", "", false},
	{answerOffForm, Error, "answers to items that are not on the candidate's form", "", false},
	{unknownItem, Error, "items that are not described", "", false},
	{unknownForm, Error, "forms that are not described", "", false},
	{formMissing, Error, "rows without a form", "", false},
	{formColumnMissing, Error, "response files that do not say who sat which form", "", false},
	{formDiffers, Error, "candidates with more than one form in one attempt", "", false},
	{versionAmbiguous, Error, "items whose version cannot be told", "", false},
	{duplicateOnForm, Error, "forms that hold a position or an item twice", "", false},
	{conflictingItem, Error, "items described twice in different ways", "", false},
	{keyContradictory, Error, "keys that contradict each other", "", false},
	{keyNotAnOption, Error, "keys that are not among the options", "", false},
	{optionOrderWrong, Error, "option orders that do not hold each option once", "", false},
	{conflictingResponse, Error, "answers that differ for one candidate and item", "", false},
	{conflictingDuplicate, Error, "candidates with rows that contradict each other", "", false},
	{undeclaredLabel, Error, "group labels that the plan does not declare", "", false},
	{severalLabels, Error, "candidates with several labels of one grouping", "", false},
	{tooManyLabels, Error, "groupings with too many labels", "", false},
	{missingGrouping, Error, "groupings that are in no file", "", false},
	{labelNotInData, Error, "labels of a comparison that no candidate has", "", false},
	{externalScoreMissing, Error, "matching on an external score that is not there", "", false},

	{exactDuplicate, Warning, "exact copies of a candidate row, used once", "exact copy of a candidate row, used once", false},
	{duplicateResponse, Warning, "repeated rows with the same answer, used once", "repeated row with the same answer, used once", false},
	{duplicateItemRow, Warning, "repeated rows of the items file, used once", "repeated row of the items file, used once", false},
	{duplicateCandidateRow, Warning, "repeated rows of the candidates file, used once", "repeated row of the candidates file, used once", false},
	{noCandidateRow, Warning, "candidates without a row in the candidates file; their groups are not stated", "candidate without a row in the candidates file; the groups are not stated", false},
	{emptyLabel, Warning, "candidates without a stated label of a grouping", "candidate without a stated label of a grouping", false},
	{identifiersEndInZeros, Warning, "identifiers whose last digits may have been rounded away", "identifier whose last digits may have been rounded away", false},
	{identifiersLostZeros, Warning, "identifiers that may have lost leading zeros", "identifier that may have lost leading zeros", false},
	{identifiersMixedLength, Warning, "numeric identifiers of differing lengths", "numeric identifier of another length", false},
	{keyMissing, Warning, "items without a key: not scored, and no part of the matching score", "item without a key: not scored, and no part of the matching score", true},
	{choiceWithoutKey, Warning, "items answered with choices and without a key: not scored, and no part of the matching score", "item answered with choices and without a key: not scored, and no part of the matching score", true},
	{scoreAssumed, Warning, "items whose answers were taken as scores", "item whose answers were taken as scores", true},
	{itemColumnAbsent, Warning, "items of the items file without a column: not presented to anybody", "item of the items file without a column: not presented to anybody", true},
	{codeIsOption, Warning, "items with a value that is also a code of missing answers, which wins", "item with a value that is also a code of missing answers, which wins", true},
	{keyOptionMismatch, Warning, "items whose keys name different options on different forms", "item whose keys name different options on different forms", true},
	{missingCodeOffForm, Warning, "codes of missing answers for items that are not on the candidate's form, taken as not presented", "code of a missing answer for an item that is not on the candidate's form, taken as not presented", false},
}

// describe returns what a kind is about.
func describe(code string) (about string, severity Severity) {
	for i := range kinds {
		if kinds[i].code == code {
			return kinds[i].about, kinds[i].severity
		}
	}
	panic("intake: undescribed kind of problem " + code)
}
