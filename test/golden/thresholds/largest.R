# Quantiles of the largest |Z| of k normals of equal correlation, by one-dimensional integration over what they share.
# Run in this folder: Rscript largest.R > largest.json      (R 4.2.2, base packages only)
coverage <- function(crit, k, rho) integrate(function(u) {
  inside <- pnorm((crit - sqrt(rho) * u) / sqrt(1 - rho)) - pnorm((-crit - sqrt(rho) * u) / sqrt(1 - rho))
  dnorm(u) * inside^k
}, -9, 9, rel.tol = 1e-12, subdivisions = 1000)$value
quantile_of <- function(level, k, rho) uniroot(function(crit) coverage(crit, k, rho) - level, c(1, 6), tol = 1e-13)$root
cases <- data.frame(k = c(3, 10, 10, 40), rho = c(0.5, 0.5, 0.9, 0.3), level = c(0.95, 0.95, 0.9, 0.95))
rows <- apply(cases, 1, function(one) sprintf('  {"k": %d, "rho": %.1f, "level": %.2f, "quantile": %.15g}',
  as.integer(one["k"]), one["rho"], one["level"], quantile_of(one["level"], one["k"], one["rho"])))
cat("[\n", paste(rows, collapse = ",\n"), "\n]\n", sep = "")
