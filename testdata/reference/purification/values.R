# Purification of the matching score of the 24 items: two stages, and repeated until
# the set of removed items comes back.

# letter is the class of an item from its delta, standard error and p-value.
letter <- function(values) {
  size <- abs(values$delta)
  if (values$p_value >= 0.05 || size < 1) return("A")
  large <- size >= 1.5 && (size - 1) / values$delta_se > qnorm(0.95)
  paste0(if (large) "C" else "B", if (values$delta > 0) "+" else "-")
}

# tested gives every item matched on the items kept plus the item itself.
tested <- function(removed) {
  lapply(colnames(verbal_items), function(item) {
    kept <- union(setdiff(colnames(verbal_items), removed), item)
    values <- mantel_haenszel_values(verbal_strata(item, rowSums(verbal_items[, kept])), exact = FALSE)
    c(list(name = item), values[c("chi_square", "p_value", "chi_square_corrected", "p_value_corrected",
                                  "odds_ratio", "log_odds_ratio", "log_odds_ratio_se", "delta", "delta_se")],
      list(class = letter(values)))
  })
}

large_items <- function(items) {
  vapply(Filter(function(item) startsWith(item$class, "C"), items), function(item) item$name, "")
}

stage <- function(name, removed) {
  items <- tested(removed)
  list(name = name, removed_items = I(removed), large_items = I(large_items(items)), items = items)
}

first <- stage("stage_1", character(0))
second <- stage("stage_2", large_items(first$items))

# Every pass removes the large items of the pass before; the first set that was
# removed before ends it. Here a cycle: the union of its sets is removed last.
removed_sets <- list(character(0))
repeat {
  following <- large_items(tested(removed_sets[[length(removed_sets)]]))
  seen <- which(vapply(removed_sets, setequal, TRUE, following))
  if (length(seen) > 0) break
  removed_sets <- c(removed_sets, list(following))
}
in_cycle <- Reduce(union, removed_sets[seen[1]:length(removed_sets)])
in_cycle <- colnames(verbal_items)[colnames(verbal_items) %in% in_cycle]

write_values("purification", list(
  program = program, stages = list(first, second),
  iterative = list(removed_sets = lapply(removed_sets, I), returns_to = seen[1], cycled = seen[1] < length(removed_sets),
                   final = stage("final", in_cycle))))
