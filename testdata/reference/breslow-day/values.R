# Centred trend test of the odds ratio, by code of its own: the expected cell is
# found as the root of its defining equation, not by the quadratic formula.

# expected_cell solves odds ratio(a) = alpha in one stratum. On the scale u with
# a = low + (high - low) / (1 + exp(-u)) the log odds ratio rises from minus to plus
# infinity, so there is one root.
expected_cell <- function(stratum, alpha) {
  n_reference <- stratum[["a"]] + stratum[["b"]]
  n_focal <- stratum[["c"]] + stratum[["d"]]
  correct <- stratum[["a"]] + stratum[["c"]]
  low <- max(0, correct - n_focal)
  high <- min(n_reference, correct)
  cell <- function(u) low + (high - low) * plogis(u)
  excess <- function(u) {
    a <- cell(u)
    log(a) + log(n_focal - correct + a) - log(n_reference - a) - log(correct - a) - log(alpha)
  }
  cell(uniroot(excess, c(-25, 25), tol = 1e-14, maxiter = 1000)$root)
}

# trend_values gives T_c with the variances of cell a under the common odds ratio.
trend_values <- function(strata) {
  strata <- informative(strata)
  n_reference <- strata[, "a"] + strata[, "b"]
  n_focal <- strata[, "c"] + strata[, "d"]
  correct <- strata[, "a"] + strata[, "c"]
  total <- n_reference + n_focal
  alpha <- sum(strata[, "a"] * strata[, "d"] / total) / sum(strata[, "b"] * strata[, "c"] / total)
  expected <- apply(strata, 1, expected_cell, alpha = alpha)
  variance <- 1 / (1 / expected + 1 / (n_reference - expected) + 1 / (correct - expected) +
                     1 / (n_focal - correct + expected))
  centred <- strata[, "x"] - weighted.mean(strata[, "x"], variance)
  statistic <- sum(centred * (strata[, "a"] - expected))^2 / sum(centred^2 * variance)
  list(trend_statistic = statistic, trend_p_value = pchisq(statistic, 1, lower.tail = FALSE))
}

write_values("breslow-day", list(
  program = program,
  tables = lapply(published_tables, function(case) c(case["name"], trend_values(case$strata))),
  items = lapply(verbal_cases, function(case) c(case["name"], trend_values(case$strata)))), "trend.json")
