# Upper tails and quantiles of the chi-square and the normal distribution.

chi_square_points <- c(1e-8, 1e-6, 1e-4, 0.01, 0.1, 0.5, 1, 2, 3.841458820694124, 5, 7.5, 10, 15, 20, 30, 50, 75, 100,
                       150, 200, 300, 500, 750, 1000, 1250, 1400)
chi_square <- expand.grid(x = chi_square_points, df = 1:30)
normal_points <- c(seq(-37, 37, by = 0.5), 1e-10, 1e-4, -1e-4, 1.6448536269514722, 1.959963984540054)
quantile_points <- c(10^-c(300, 250, 200, 150, 100, 75, 50, 30, 20, 15, 12, 10, 8, 6, 5, 4, 3), 0.005, 0.01, 0.025, 0.05,
                     seq(0.1, 0.9, by = 0.1), 0.95, 0.975, 0.99, 0.999, 0.9999)

write_values("distributions", list(
  program = program,
  chi_square_upper = cbind(df = chi_square$df, x = chi_square$x, p = pchisq(chi_square$x, chi_square$df, lower.tail = FALSE)),
  normal_upper = cbind(z = normal_points, p = pnorm(normal_points, lower.tail = FALSE)),
  normal_lower = cbind(z = normal_points, p = pnorm(normal_points)),
  normal_upper_quantile = cbind(p = quantile_points, z = qnorm(quantile_points, lower.tail = FALSE)),
  chi_square_quantile = cbind(df = c(1:10, 20, 30), p = 0.95, x = qchisq(0.95, c(1:10, 20, 30)))))
