package reports

import "difaudit/dif"

// methodWords explains a method of the evidence in a report.
type methodWords struct {
	id, name, text string
}

// methodsInWords explains the methods by id. A method without an entry is named by its id.
var methodsInWords = []methodWords{
	{"mantel_haenszel", "Mantel-Haenszel", "Compares the odds of a right answer of the two groups at every matching score and pools them into one odds ratio " +
		"(Mantel & Haenszel 1959; Holland & Thayer 1988 for items). D-DIF is -2.35 times its natural logarithm: 0 is no difference, negative is harder for the focal group. " +
		"The standard error is that of Robins, Breslow & Greenland (1986), intervals are 95 %. The chi-square has one degree of freedom. Where matching scores are very sparse an exact conditional p-value is given beside it."},
	{"breslow_day", "Breslow-Day, Tarone, trend", "Asks whether the odds ratio is the same at all matching scores (Breslow & Day 1980; corrected after Tarone 1985). " +
		"The trend test asks whether it rises or falls with the score (Penfield 2003); it is the sign of non-uniform differences used here. Breslow-Day and Tarone are left out where matching scores hold few candidates."},
	{"standardization", "Standardized difference (P-DIF)", "The mean difference between the groups in the proportion correct, weighted by how the focal group spreads over the scores " +
		"(Dorans & Kulick 1986; Dorans & Holland 1993); the standard error is the two-category case of Zwick & Thayer (1996). -0.10 means 10 in 100 fewer right answers of focal candidates at equal scores. It is shown beside D-DIF and never decides a letter."},
}

// questionsElsewhere are questions of an audit that other methods answer. The report
// says so where the plan has none of them.
var questionsElsewhere = []methodWords{
	{"likelihood_ratio", "", "tests on item response models (likelihood ratio)"},
	{"logistic", "", "logistic regression"},
	{"polytomous", "", "statistics for items with more than two scores"},
	{"empirical_bayes", "", "the chance of each true class given all items"},
	{"distractors", "", "which wrong answers the groups chose"},
}

// references lists the sources in the order of their authors; the method ids say which
// plan needs them, and none means every report does.
var references = []struct {
	methods []string
	text    string
}{
	{nil, "Benjamini & Hochberg (1995), Journal of the Royal Statistical Society B 57:289-300. (q-values)"},
	{[]string{"breslow_day"}, "Breslow & Day (1980), Statistical Methods in Cancer Research, volume 1, IARC. (equal odds ratios)"},
	{nil, "Dorans & Holland (1993), in Holland & Wainer (eds.), Differential Item Functioning, 35-66. (letters; P-DIF)"},
	{[]string{"standardization"}, "Dorans & Kulick (1986), Journal of Educational Measurement 23:355-368. (P-DIF)"},
	{[]string{"mantel_haenszel"}, "Holland & Thayer (1988), in Wainer & Braun (eds.), Test Validity, 129-145. (D-DIF; refinement of the matching score)"},
	{[]string{"mantel_haenszel"}, "Mantel & Haenszel (1959), Journal of the National Cancer Institute 22:719-748. (test and common odds ratio)"},
	{[]string{"mantel_haenszel"}, "Paek (2010), Applied Psychological Measurement 34:539-548. (continuity correction)"},
	{[]string{"breslow_day"}, "Penfield (2003), Alberta Journal of Educational Research 49:231-243. (trend test)"},
	{[]string{"mantel_haenszel"}, "Robins, Breslow & Greenland (1986), Biometrics 42:311-323. (standard error)"},
	{[]string{"breslow_day"}, "Tarone (1985), Biometrika 72:91-95. (corrected test of equal odds ratios)"},
	{nil, "Zieky (1993), in Holland & Wainer (eds.), Differential Item Functioning, 337-347. (letters)"},
	{[]string{"standardization"}, "Zwick & Thayer (1996), Journal of Educational and Behavioral Statistics 21:187-201. (standard error of P-DIF)"},
	{nil, "Zwick (2012), ETS Research Report RR-12-08. (letters; minimum numbers of candidates)"},
}

// letterRule words the published rule of the letters, with the level of the plan.
func letterRule(c dif.Criteria) [][2]string {
	alpha := shortest(&c.ClassAlpha)
	return [][2]string{
		{"A", "The test of no difference has p of " + alpha + " or more, or D-DIF is smaller than 1.0 in size."},
		{"C- or C+", "p is below " + alpha + ", D-DIF is 1.5 or more in size, and it is significantly larger than 1.0 (one-sided 5 % test: its excess over 1.0 is more than 1.645 standard errors)."},
		{"B- or B+", "Everything between."},
		{"Sign", "- is harder, + is easier for the focal group than for matched candidates of the reference group."},
	}
}
