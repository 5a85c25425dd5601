# Quantiles of |T + t|, T Student's with df degrees of freedom: the root q of P(|T + t| > q) = 1 - p, by R's uniroot on pt in
# logarithms, then Newton steps. Made by R 4.2.2, base only: Rscript folded-student.R > folded-student.json
options(digits = 17)
quantile_of <- function(outside, t, df) {
  log_outside <- function(q) {
    a <- pt(q - t, df, lower.tail = FALSE, log.p = TRUE)
    a + log1p(exp(pt(q + t, df, lower.tail = FALSE, log.p = TRUE) - a))
  }
  q <- uniroot(function(q) log_outside(q) - log(outside), c(0, t - qt(outside/2, df) + 1), tol = 1e-12)$root
  for (step in 1:5) {
    slope <- -exp(log(dt(q - t, df) + dt(q + t, df)) - log_outside(q))
    q <- q - (log_outside(q) - log(outside)) / slope
  }
  q
}
of <- expand.grid(outside = c(0.5, 0.2, 0.1, 0.05, 0.01, 0.001), t = c(0, 1e-6, 0.1, 0.5, 1, 2, 5, 20, 1e3, 1e6),
                  df = c(1, 2, 3.7, 7, 30, 400, 1e5))
of$q <- mapply(quantile_of, of$outside, of$t, of$df)
cat('{\n  "made_by": "folded-student.R, R 4.2.2",\n  "quantiles": [\n',
    paste(sprintf('    [%.17g, %.17g, %.17g, %.17g]', of$outside, of$t, of$df, of$q), collapse = ',\n'), '\n  ]\n}\n', sep = '')
