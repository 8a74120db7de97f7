# Ten yes/no questions of which some were not answered, read as not presented: people are
# matched within the set of questions they were presented, by their total over that set.

worry <- read.csv(file.path(data_folder, "nz-health-survey", "nz-worry.csv"), na.strings = "")
worry_items <- as.matrix(worry[, -(1:4)])
presented_set <- apply(!is.na(worry_items), 1, function(shown) paste(as.integer(shown), collapse = ""))
worry_total <- rowSums(worry_items, na.rm = TRUE)
# One number a stratum: the set, then the total within it.
worry_score <- match(presented_set, sort(unique(presented_set))) * 100 + worry_total

presented_values <- function(item, grouping, reference, focal) {
  strata <- strata_of(worry_score, worry_items[, item], worry[[grouping]], reference, focal)
  used <- comparable(strata)
  values <- mantel_haenszel_values(used, exact = FALSE)
  counts <- function(strata) c(sum(strata[, c("a", "b")]), sum(strata[, c("c", "d")]))
  all <- counts(strata)
  matched <- counts(used)
  c(list(name = item, n_reference = all[1], n_focal = all[2], n_matched_reference = matched[1], n_matched_focal = matched[2],
         strata_used = nrow(used), strata_informative = nrow(informative(strata))), values, standardization_values(strata))
}

comparison <- function(grouping, reference, focal) {
  list(grouping = grouping, reference = reference, focal = focal,
       items = lapply(colnames(worry_items), presented_values, grouping, reference, focal))
}

write_values("presented-sets", list(
  program = program, data = "nz-health-survey/nz-worry.csv", presented_sets = length(unique(presented_set)),
  comparisons = list(comparison("sex", "F", "M"), comparison("ethnicity", "European", "Maori"))))
