# Standardized difference in proportions correct, focal weights, with the standard
# error that follows from the hypergeometric variance of each stratum.

standardization_values <- function(strata) {
  strata <- comparable(strata)
  n_reference <- rowSums(strata[, c("a", "b"), drop = FALSE])
  n_focal <- rowSums(strata[, c("c", "d"), drop = FALSE])
  weight <- n_focal / sum(n_focal)
  difference <- strata[, "c"] / n_focal - strata[, "a"] / n_reference
  variance <- (1 / n_focal + 1 / n_reference)^2 * hypergeometric_variance(strata)
  list(p_dif = sum(weight * difference), p_dif_se = sqrt(sum(weight^2 * variance)))
}

write_values("standardization", list(
  program = program,
  tables = lapply(published_tables, function(case) c(case, standardization_values(case$strata))),
  items = lapply(verbal_cases, function(case) c(case, standardization_values(case$strata)))))
