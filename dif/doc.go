// Package dif computes differential item functioning (DIF): whether candidates of
// equal ability from a reference and a focal group have the same chance on an item.
// It decides every class, reason, warning and default of an audit; everything outside
// only carries and shows them.
//
// Run takes a Plan and Data and returns Evidence. Inside, answers are packed to bits
// and counted once per matching score (pack.go, arrange.go, tabulate.go); the Methods
// read the count tables of one item; letters and reasons follow (findings.go,
// classify.go). The package does no input or output, reads no clock and uses no
// randomness without a seed.
//
// # Signs
//
// Negative D-DIF means harder for the focal group once candidates are matched. The odds
// ratio and its logarithm are reference over focal, so they run the other way.
//
// # Methods
//
// mantel_haenszel: is the common odds ratio over matching levels 1? Chi-square with one
// degree of freedom, without and with the correction of one half; common odds ratio;
// D-DIF = -2.35 ln(odds ratio), its standard error and interval; an exact conditional test
// for sparse tables. Assumes that candidates at one level are comparable and that the odds
// ratio does not change over levels. It gives the letter. Mantel & Haenszel (1959); Holland &
// Thayer (1988); Robins, Breslow & Greenland (1986).
//
// breslow_day: is the odds ratio the same at every level? Breslow-Day chi-square, with
// Tarone's adjustment, and a centred trend test with one degree of freedom. A small p-value
// of the trend points to a difference that changes with ability. Breslow & Day (1980); Tarone
// (1985); Penfield (2003).
//
// standardization: by how much does the proportion correct differ, weighted by the focal
// distribution? P-DIF, negative when harder for the focal group, with the standard error
// from the hypergeometric model. Dorans & Kulick (1986); Zwick & Thayer (1996).
//
// # Matching
//
// The matching score contains the studied item, also when the item was left out of the
// score by purification or is a pretest item: its own score is then added. Candidates who
// were presented different items are matched within the set they were presented
// (matching.variable "total_within_set" in evidence). An external score is used as it is,
// each distinct value a level, in one stage.
//
// # Evidence
//
// Keys beyond the ones the schema names, always after them in their object:
//
//   - notice: who may read the document.
//   - inputs.warnings: what intake noticed, as code and message without values.
//   - inputs.groupings[]: per compared grouping the analysed candidates by label and the not stated.
//   - inputs.items[].content_area: as in the items file.
//   - groups.reference.unmatched, groups.focal.unmatched: candidates at stage-1 levels that
//     hold nobody of the other group.
//   - matching.sets: the presented sets that hold both groups: set (the number that strata
//     refer to), form, items, n_reference, n_focal.
//   - matching.stages[]: stage, removed_items, and per item chi_square, p_value, delta,
//     delta_se, computed_class, detail. The p-value is the one that decides the letter.
//   - summary.expected_by_chance.tests, .significant: items with a p-value, and how many of
//     them would fall below class_alpha if no item differed. b_or_c and c are summed over the
//     items that have a class.
//   - items[].n_informative: candidates in informative strata; difficulty_reference and
//     difficulty_focal: the normal delta 13 + 4z of the proportion correct.
//
// Exclusions: an entry without grouping counts a reason once; entries with a grouping split
// it by label (null: not stated).
package dif
