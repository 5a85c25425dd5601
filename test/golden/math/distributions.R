# Values of the normal, Student, chi-square, F and gamma functions for test/math/distributions.test.ts.
# Made by R 4.2.2, base only: Rscript distributions.R > distributions.json
# qt of R 4.2 is off by up to 1e-2 in far tails of few degrees of freedom and by 1e-10 beside the median, so its values
# are polished here by Newton steps on R's own pt (tails, in logarithms) and pf (of the square, beside the median).
options(digits = 17)
number <- function(v) ifelse(is.finite(v), sprintf('%.17g', v), 'null')
rows <- function(name, table) {
  lines <- apply(sapply(table, number), 1, function(r) paste0('    [', paste(r, collapse = ', '), ']'))
  cat(sprintf('  "%s": [\n%s\n  ]', name, paste(lines, collapse = ',\n')))
}

student_quantile <- function(p, df) {
  if (p == 0.5) return(0)
  tail <- min(p, 1 - p)
  u <- log(abs(qt(tail, df)))
  for (step in 1:60) {
    t <- exp(u)
    if (!is.finite(t)) return(Inf)
    if (tail > 0.25) {
      centre <- 2 * abs(p - 0.5)
      slope <- 2 * dt(t, df) * t
      u <- u + (centre - pf(t^2, 1, df)) / slope
    } else {
      log_tail <- pt(-t, df, log.p = TRUE)
      u <- u + (log_tail - log(tail)) / exp(dt(t, df, log = TRUE) + u - log_tail)
    }
  }
  if (p < 0.5) -exp(u) else exp(u)
}

z <- c(0, 1e-12, 0.01, 0.3, 0.5, 0.67, 0.68, 1, 1.2815515655446004, 1.96, 2.5, 3, 4, 5, 5.65, 5.66, 6, 7, 8.3, 10, 15, 20, 25, 30, 35, 37)
p <- c(1e-300, 1e-250, 1e-200, 1e-100, 1e-50, 1e-20, 1e-17, 1e-16, 1e-12, 1e-11, 1e-8, 1e-5, 0.001, 0.01, 0.025, 0.05, 0.074,
       0.076, 0.1, 0.25, 0.4, 0.49, 0.499999, 0.5, 0.51, 0.6, 0.75, 0.9, 0.95, 0.975, 0.99, 0.999, 0.999999)
degrees <- c(0.3, 0.5, 1, 1.5, 2, 2.5, 3, 4.7, 10, 30.25, 100, 1e3, 1e4, 1e5, 1e6, 1e8)
t <- expand.grid(t = c(1e-8, 0.01, 0.3, 0.7, 1, 1.5, 1.96, 2.5, 3, 5, 8, 12, 20, 37, 100, 1e3, 1e6), df = degrees)
tq <- expand.grid(p = p, df = degrees)
chiDegrees <- c(0.5, 1, 2, 3, 5, 7.5, 10, 50, 200, 1e3, 1e4, 1e5)
chi <- expand.grid(share = c(0.01, 0.1, 0.5, 0.9, 1, 1.1, 1.5, 2, 3, 5, 10, 40, 100, 300, 1000), df = chiDegrees)
chi$x <- chi$share * chi$df
chi <- chi[pchisq(chi$x, chi$df, lower.tail = FALSE, log.p = TRUE) > -700, ]

cat('{\n  "made_by": "distributions.R, R 4.2.2",\n')
rows('normal', data.frame(z, pnorm(-z), pnorm(z)))
cat(',\n')
rows('normal_quantile', data.frame(p, qnorm(p)))
cat(',\n')
rows('student', data.frame(t$t, t$df, 2 * pt(-t$t, t$df)))
cat(',\n')
rows('student_quantile', data.frame(tq$p, tq$df, mapply(student_quantile, tq$p, tq$df)))
cat(',\n')
rows('chi_square', data.frame(chi$x, chi$df, pchisq(chi$x, chi$df, lower.tail = FALSE)))
cat('\n}\n')
