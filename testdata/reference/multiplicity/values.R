# Benjamini-Hochberg adjustment by p.adjust: the 24 items, and p-values with ties.

uncorrected <- vapply(verbal_cases, function(case) mantel_haenszel_values(case$strata, exact = FALSE)$p_value, 0)
tied <- c(0.04, 0.01, 0.04, 1, 0.5, 0.01, 1e-12, 0.049)

adjusted <- function(name, p) {
  list(name = name, p_values = I(p), q_values = I(p.adjust(p, method = "BH")), holm = I(p.adjust(p, method = "holm")))
}

write_values("multiplicity", list(program = program, cases = list(
  c(list(check = "CV-20"), adjusted("verbal-binary", uncorrected)), adjusted("tied", tied), adjusted("one", 0.03))))
