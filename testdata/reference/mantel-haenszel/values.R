# Mantel-Haenszel values by base R's mantelhaen.test.

# mantel_haenszel_values gives the statistics of one table. Strata with one group
# only add nothing to any of them; mantelhaen.test refuses a stratum of fewer than
# two people, so the comparable strata are handed over where one occurs.
mantel_haenszel_values <- function(strata, exact = TRUE) {
  if (any(rowSums(strata[, -1, drop = FALSE]) < 2)) strata <- comparable(strata)
  # mantelhaen.test wants two strata or more; one in which nobody is correct adds nothing.
  padded <- if (nrow(strata) == 1) rbind(strata, c(0, 0, 1, 0, 1)) else strata
  cube <- as_cube(padded)
  plain <- mantelhaen.test(cube, correct = FALSE)
  corrected <- mantelhaen.test(cube, correct = TRUE)
  correct <- strata[, "a"] + strata[, "c"]
  expected <- (strata[, "a"] + strata[, "b"]) * correct / rowSums(strata[, -1, drop = FALSE])
  # R 4.2 leaves the correction out where the deviation is below one half; the
  # corrected statistic is 0 there.
  chi_square_corrected <- unname(corrected$statistic)
  p_value_corrected <- corrected$p.value
  if (abs(sum(strata[, "a"]) - sum(expected)) < 0.5) {
    chi_square_corrected <- 0
    p_value_corrected <- 1
  }
  odds_ratio <- unname(plain$estimate)
  values <- list(
    sum_a = sum(strata[, "a"]), sum_expected = sum(expected),
    sum_variance = sum(hypergeometric_variance(strata)),
    chi_square = unname(plain$statistic), p_value = plain$p.value,
    chi_square_corrected = chi_square_corrected, p_value_corrected = p_value_corrected,
    odds_ratio = NA, log_odds_ratio = NA, log_odds_ratio_se = NA, delta = NA, delta_se = NA)
  if (odds_ratio > 0 && is.finite(odds_ratio)) {
    # The interval is exp(log estimate -+ z se): its width gives the standard error.
    se <- log(plain$conf.int[2] / plain$conf.int[1]) / (2 * qnorm(0.975))
    values$odds_ratio <- odds_ratio
    values$log_odds_ratio <- log(odds_ratio)
    values$log_odds_ratio_se <- se
    values$delta <- -2.35 * log(odds_ratio) + 0 # no negative zero
    values$delta_se <- 2.35 * se
  }
  if (exact) values$exact_p_value <- mantelhaen.test(cube, exact = TRUE)$p.value
  values
}

# Sparse tables, made by hand: arithmetic only.
sparse <- function(name, ...) {
  cells <- rbind(...)
  list(name = name, check = "exact test",
       strata = cbind(x = seq_len(nrow(cells)) - 1, a = cells[, 1], b = cells[, 2], c = cells[, 3], d = cells[, 4]))
}
sparse_tables <- list(
  sparse("symmetric", c(3, 1, 1, 3), c(1, 3, 1, 3)),
  sparse("one-stratum", c(5, 2, 1, 6)),
  sparse("pairs", c(1, 0, 0, 1), c(1, 0, 0, 1), c(0, 1, 1, 0), c(1, 0, 0, 1), c(1, 0, 1, 0), c(1, 0, 0, 1)),
  sparse("no-difference", c(2, 2, 2, 2), c(3, 1, 3, 1)),
  sparse("small-deviation", c(2, 3, 1, 2), c(4, 2, 3, 1)),
  sparse("with-degenerate-stratum", c(4, 0, 3, 0), c(3, 2, 1, 4), c(0, 5, 1, 2)),
  sparse("odds-ratio-zero", c(0, 7, 3, 4), c(0, 5, 2, 3)),
  sparse("odds-ratio-infinite", c(6, 2, 0, 4), c(5, 0, 2, 2)),
  sparse("uneven-groups", c(11, 1, 2, 2), c(8, 0, 1, 1), c(20, 2, 2, 0)))
stopifnot(all(vapply(sparse_tables, function(case) sum(hypergeometric_variance(comparable(case$strata))) < 5, TRUE)))

write_values("mantel-haenszel", list(
  program = program,
  tables = lapply(published_tables, function(case) c(case, mantel_haenszel_values(case$strata, case$name != "china-smoking"))),
  sparse = lapply(sparse_tables, function(case) c(case, mantel_haenszel_values(case$strata))),
  items = lapply(verbal_cases, function(case) c(case, mantel_haenszel_values(case$strata)))))
