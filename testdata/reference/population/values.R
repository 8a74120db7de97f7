# The Mantel-Haenszel odds ratio in the population when the items are known: the
# distribution of the score given theta comes from the recursion over items of
# F. M. Lord and M. S. Wingersky (1984), averaged over each group's normal distribution.

# score_distribution gives Pr(score = 0..I | theta), rows theta, for correct-answer
# probabilities in the columns of p.
score_distribution <- function(p) {
  distribution <- matrix(1, nrow(p), 1)
  for (item in seq_len(ncol(p))) {
    distribution <- cbind(distribution * (1 - p[, item]), 0) + cbind(0, distribution * p[, item])
  }
  distribution
}

# joint_distribution gives Pr(response, rest score) in a group: rows incorrect, correct.
joint_distribution <- function(slopes, difficulties, studied, mean) {
  theta <- seq(mean - 10, mean + 10, length.out = 4001)
  weight <- dnorm(theta, mean)
  weight <- weight / sum(weight)
  p <- plogis(sweep(outer(theta, difficulties, "-"), 2, slopes, "*"))
  rest <- score_distribution(p[, -studied])
  rbind(colSums(weight * (1 - p[, studied]) * rest), colSums(weight * p[, studied] * rest))
}

# population_odds_ratio pools the tables of both groups, equal in size.
population_odds_ratio <- function(reference, focal) {
  total <- colSums(reference) + colSums(focal)
  used <- total > 0
  sum((reference[2, ] * focal[1, ] / total)[used]) / sum((reference[1, ] * focal[2, ] / total)[used])
}

# by_total shifts the correct answers by one, so that the columns are total scores.
by_total <- function(joint) rbind(c(joint[1, ], 0), c(0, joint[2, ]))

population_values <- function(name, slopes, difficulties, studied, focal_mean = -1) {
  reference <- joint_distribution(slopes, difficulties, studied, 0)
  focal <- joint_distribution(slopes, difficulties, studied, focal_mean)
  total <- population_odds_ratio(by_total(reference), by_total(focal))
  rest <- population_odds_ratio(reference, focal)
  list(name = name, check = "CV-21", slopes = slopes, difficulties = difficulties, studied = studied,
       reference_mean = 0, focal_mean = focal_mean, sd = 1,
       total_score = list(odds_ratio = total, delta = -2.35 * log(total)),
       rest_score = list(odds_ratio = rest, delta = -2.35 * log(rest)))
}

write_values("population", list(program = program, designs = list(
  population_values("rasch-10", rep(1, 10), seq(-1.35, 1.35, by = 0.3), 5),
  population_values("rasch-40", rep(1, 40), seq(-2, 2, length.out = 40), 20),
  population_values("steep-item-20", replace(rep(1, 20), 11, 2), seq(-2, 2, length.out = 20), 11))))
