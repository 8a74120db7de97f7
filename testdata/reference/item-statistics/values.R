# Descriptive statistics of items and of the total score, by mean, sd, var and cor.

# coefficient_alpha is Cronbach's alpha of a matrix of item scores.
coefficient_alpha <- function(items) {
  count <- ncol(items)
  count / (count - 1) * (1 - sum(apply(items, 2, var)) / var(rowSums(items)))
}

item_values <- function(items, item) {
  rest <- rowSums(items) - items[, item]
  list(n = nrow(items), p = mean(items[, item]), item_rest_correlation = cor(items[, item], rest))
}

score_values <- function(score) list(n = length(score), mean = mean(score), sd = sd(score))

# standardized_difference is (focal - reference) over the pooled standard deviation.
standardized_difference <- function(reference, focal) {
  freedom <- c(length(reference), length(focal)) - 1
  (mean(focal) - mean(reference)) / sqrt(sum(freedom * c(var(reference), var(focal))) / sum(freedom))
}

group_values <- function(items, group, reference, focal) {
  score <- rowSums(items)
  list(groups = list(reference = score_values(score[group == reference]), focal = score_values(score[group == focal]),
                     standardized_mean_difference = standardized_difference(score[group == reference], score[group == focal])),
       coefficient_alpha = list(pooled = coefficient_alpha(items), reference = coefficient_alpha(items[group == reference, ]),
                                focal = coefficient_alpha(items[group == focal, ])))
}

toy <- rbind(c(1, 1, 1, 1), c(1, 1, 1, 0), c(1, 1, 0, 1), c(1, 0, 1, 0),
             c(1, 1, 0, 0), c(0, 1, 0, 0), c(1, 0, 0, 0), c(0, 0, 0, 0))

# Largest distance between the normal distribution function and the logistic one with its argument scaled.
logistic_distance <- function(scale) {
  best <- optimize(function(x) abs(pnorm(x) - plogis(scale * x)), c(0, 4), maximum = TRUE, tol = 1e-12)
  for (range in list(c(0, 1.3), c(1.3, 4))) {
    other <- optimize(function(x) abs(pnorm(x) - plogis(scale * x)), range, maximum = TRUE, tol = 1e-12)
    if (other$objective > best$objective) best <- other
  }
  list(scale = scale, distance = best$objective, at = best$maximum)
}

write_values("item-statistics", c(
  list(program = program),
  group_values(verbal_items, verbal_group, verbal_reference, verbal_focal),
  list(items = lapply(colnames(verbal_items), function(item) {
         list(name = item, reference = item_values(verbal_items[verbal_group == verbal_reference, ], item),
              focal = item_values(verbal_items[verbal_group == verbal_focal, ], item), pooled = item_values(verbal_items, item))
       }),
       toy = list(check = "CV-04", responses = toy, p = colMeans(toy), item_total_correlation = apply(toy, 2, cor, rowSums(toy)),
                  item_rest_correlation = vapply(1:4, function(item) item_values(toy, item)$item_rest_correlation, 0),
                  coefficient_alpha = coefficient_alpha(toy)),
       difficulty = lapply(c(0.5, 0.84, 0.16, 0.9, 0.05, 0.975, 0.001, 0.9999), function(p) {
         list(p = p, odds = p / (1 - p), logit = qlogis(p), delta_normal = 13 + 4 * qnorm(p, lower.tail = FALSE),
              delta_logistic = 13 - 4 / 1.7 * qlogis(p))
       }),
       logistic_distance = lapply(c(1.702, 1.7), logistic_distance))))
