# Probability of the most extreme sum of the a cells given all margins, under a stated
# common odds ratio: a product over strata of noncentral hypergeometric probabilities,
# by listing every table a stratum can have.

# cell_probabilities gives the distribution of cell a in one stratum.
cell_probabilities <- function(stratum, odds_ratio) {
  n_reference <- stratum[["a"]] + stratum[["b"]]
  n_focal <- stratum[["c"]] + stratum[["d"]]
  correct <- stratum[["a"]] + stratum[["c"]]
  cell <- seq(max(0, correct - n_focal), min(n_reference, correct))
  weight <- choose(n_reference, cell) * choose(n_focal, correct - cell) * odds_ratio^cell
  weight / sum(weight)
}

extreme_values <- function(strata) {
  strata <- comparable(strata)
  low <- exp(-1 / 2.35)
  high <- exp(1 / 2.35)
  list(odds_ratio_low = low, odds_ratio_high = high,
       probability_minimum = prod(apply(strata, 1, function(stratum) cell_probabilities(stratum, low)[1])),
       probability_maximum = prod(apply(strata, 1, function(stratum) rev(cell_probabilities(stratum, high))[1])))
}

# Arithmetic only. In the first four the observed sum is the minimum (odds ratio 0), in
# the next three the maximum (odds ratio infinite); in the last it is neither.
extreme_tables <- list(
  sparse("zero-small", c(0, 7, 3, 4), c(0, 5, 2, 3)),
  sparse("zero-large", c(0, 30, 4, 16), c(0, 25, 5, 10), c(2, 18, 10, 0)),
  sparse("zero-one-stratum", c(0, 12, 2, 6)),
  sparse("zero-with-one-group", c(0, 9, 3, 2), c(5, 4, 0, 0), c(0, 3, 0, 2), c(4, 6, 7, 0)),
  sparse("infinite-small", c(6, 2, 0, 4), c(5, 0, 2, 2)),
  sparse("infinite-large", c(28, 0, 14, 4), c(30, 0, 9, 6), c(5, 22, 0, 11)),
  sparse("infinite-easy-item", c(40, 0, 12, 1), c(55, 0, 15, 1), c(60, 0, 20, 1)),
  sparse("neither", c(3, 4, 2, 5), c(2, 2, 3, 1)))

write_values("noncentral", list(program = program,
                                cases = lapply(extreme_tables, function(case) c(case, extreme_values(case$strata)))))
