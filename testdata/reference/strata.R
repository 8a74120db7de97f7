# Strata of 2x2 tables. A stratified table is a matrix with one row a stratum and
# the columns x, a, b, c, d: score, reference correct and incorrect, focal
# correct and incorrect.

# strata_of counts one row for every value of score that occurs, in ascending
# order. item is 0/1; group holds labels, other labels than the two are left out.
strata_of <- function(score, item, group, reference, focal) {
  kept <- !is.na(score) & !is.na(item) & group %in% c(reference, focal)
  levels <- sort(unique(score[kept]))
  count <- function(label, response) {
    tabulate(match(score[kept & group == label & item == response], levels), length(levels))
  }
  cbind(x = levels, a = count(reference, 1), b = count(reference, 0),
        c = count(focal, 1), d = count(focal, 0))
}

# comparable keeps the strata with at least one member of each group.
comparable <- function(strata) {
  strata[strata[, "a"] + strata[, "b"] > 0 & strata[, "c"] + strata[, "d"] > 0, , drop = FALSE]
}

# informative keeps the comparable strata in which both outcomes occur.
informative <- function(strata) {
  strata <- comparable(strata)
  strata[strata[, "a"] + strata[, "c"] > 0 & strata[, "b"] + strata[, "d"] > 0, , drop = FALSE]
}

# hypergeometric_variance is the variance of cell a in each stratum, given its margins.
hypergeometric_variance <- function(strata) {
  n_reference <- strata[, "a"] + strata[, "b"]
  n_focal <- strata[, "c"] + strata[, "d"]
  correct <- strata[, "a"] + strata[, "c"]
  total <- n_reference + n_focal
  ifelse(total > 1, n_reference * n_focal * correct * (total - correct) / (total^2 * (total - 1)), 0)
}

# as_cube arranges strata as the 2x2xK array mantelhaen.test takes.
as_cube <- function(strata) {
  array(t(strata[, c("a", "c", "b", "d")]), c(2, 2, nrow(strata)))
}
