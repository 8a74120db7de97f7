# The data sets and tables the reference values are computed from.

published_table <- function(name) {
  cells <- as.matrix(read.csv(file.path(data_folder, "tables", paste0(name, ".csv")))[, c("x", "a", "b", "c", "d")])
  storage.mode(cells) <- "double" # products of counts overflow integers
  cells
}

published_tables <- list(
  list(name = "china-smoking", check = "CV-05", strata = published_table("china-smoking")),
  list(name = "ucb-admissions", check = "CV-06", strata = published_table("ucb-admissions")),
  list(name = "rabbits", check = "CV-07", strata = published_table("rabbits")),
  list(name = "hand-2x2", check = "CV-08", strata = published_table("hand-2x2")))

# The copy of the admissions table must equal the one R ships.
stopifnot(all(as_cube(published_tables[[2]]$strata) == aperm(unclass(UCBAdmissions), c(2, 1, 3))))

verbal <- read.csv(file.path(data_folder, "verbal-aggression", "verbal-binary.csv"), check.names = FALSE)
verbal_group <- verbal$gender
verbal_items <- as.matrix(verbal[, -(1:2)])
verbal_total <- rowSums(verbal_items)
verbal_reference <- "F"
verbal_focal <- "M"

# verbal_strata gives the table of one item, matched on score.
verbal_strata <- function(item, score = verbal_total) {
  strata_of(score, verbal_items[, item], verbal_group, verbal_reference, verbal_focal)
}

# verbal_cases gives the tables of all items, matched on the total score.
verbal_cases <- lapply(colnames(verbal_items), function(item) {
  list(name = item, check = "CV-09", strata = verbal_strata(item))
})
