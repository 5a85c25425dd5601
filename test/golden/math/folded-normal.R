# Quantiles of |N(t, 1)|: the root q of P(|Z + t| > q) = 1 - p, by R's uniroot on pnorm (logarithms), then Newton steps.
# Made by R 4.2.2, base only: Rscript folded-normal.R > folded-normal.json
options(digits = 17)
quantile_of <- function(outside, t) {
  log_outside <- function(q) {
    a <- pnorm(q - t, lower.tail = FALSE, log.p = TRUE)
    a + log1p(exp(pnorm(q + t, lower.tail = FALSE, log.p = TRUE) - a))
  }
  q <- uniroot(function(q) log_outside(q) - log(outside), c(0, t + 60), tol = 1e-12)$root
  for (step in 1:5) {
    slope <- -exp(log(dnorm(q - t) + dnorm(q + t)) - log_outside(q))
    q <- q - (log_outside(q) - log(outside)) / slope
  }
  q
}
of <- expand.grid(outside = c(0.5, 0.32, 0.2, 0.1, 0.05, 0.01, 0.001, 1e-6, 1e-12),
                  t = c(0, 1e-9, 0.01, 0.1, 0.2, 0.3, 0.5, 0.534017, 0.8, 1, 1.5, 2, 3, 5, 8, 20, 100, 1e4, 1e7))
of$q <- mapply(quantile_of, of$outside, of$t)
cat('{\n  "made_by": "folded-normal.R, R 4.2.2",\n  "quantiles": [\n',
    paste(sprintf('    [%.17g, %.17g, %.17g]', of$outside, of$t, of$q), collapse = ',\n'), '\n  ]\n}\n', sep = '')
