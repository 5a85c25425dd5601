# Kernel-weighted two-stage least squares and Anderson-Rubin sets by base R 4.2.2. Run in this folder: Rscript take-up.R
# Triangular kernel, order 1, one bandwidth; side-specific slopes; instrument: being on the treated side. Variance hc0.
options(digits = 17)
set.seed(3)
number <- function(v) paste0('[', paste(sprintf('%.17g', v), collapse = ', '), ']')
cases <- list(strong = 0.6, weak = 0.12, none = 0, under_four = 0.42, over_four = 0.28)
out <- c()
for (name in names(cases)) {
  n <- 500
  x <- runif(n, -1, 1)
  z <- as.numeric(x >= 0)
  u <- rnorm(n)
  d <- as.numeric(0.2 + cases[[name]] * z + 0.1 * x + 0.2 * u > runif(n))
  y <- 1 + 0.5 * x + 2 * d + u
  h <- 0.8
  k <- pmax(0, 1 - abs(x) / h)
  keep <- k > 0
  X <- cbind(d, 1, x, x * z)[keep, ]
  Z <- cbind(z, 1, x, x * z)[keep, ]
  W <- k[keep]
  bread <- solve(t(Z) %*% (W * X))
  beta <- bread %*% (t(Z) %*% (W * y[keep]))
  e <- y[keep] - X %*% beta
  V <- bread %*% (t(Z * (W * as.vector(e))) %*% (Z * (W * as.vector(e)))) %*% t(bread)
  # the two jumps and their influences
  side <- cbind(z, 1, x, x * z)[keep, ]
  solveside <- solve(t(side) %*% (W * side)) %*% t(side * W)
  jump <- function(v) (solveside %*% v[keep])[1]
  psi <- function(v) solveside[1, ] * (v[keep] - side %*% (solveside %*% v[keep]))
  jy <- jump(y); jd <- jump(d); py <- psi(y); pd <- psi(d)
  q <- qnorm(0.975)
  g <- function(t) (jy - t * jd)^2 - q^2 * sum((py - t * pd)^2)
  # roots of the definition on a wide grid, polished
  grid <- tan(seq(-pi / 2 + 1e-4, pi / 2 - 1e-4, length.out = 40001))
  values <- sapply(grid, g)
  change <- which(values[-1] * values[-length(values)] < 0)
  ends <- sapply(change, function(i) uniroot(g, grid[c(i, i + 1)], tol = 1e-13)$root)
  out <- c(out, paste0('  "', name, '": {"x": ', number(x), ', "d": ', number(d), ', "y": ', number(y),
    ', "ratio": ', number(beta[1]), ', "standardError": ', number(sqrt(V[1, 1])), ', "f": ', number(jd^2 / sum(pd^2)),
    ', "ends": ', if (length(ends)) number(ends) else '[]', ', "insideAtRatio": ', if (g(beta[1]) <= 0) 'true' else 'false', '}'))
}
writeLines(paste0('{\n', paste(out, collapse = ',\n'), '\n}'), 'take-up.json')
