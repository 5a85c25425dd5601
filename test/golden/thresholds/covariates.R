# Joint kernel-weighted least squares with covariates, with and without line dummies, by base R 4.2.2. Rscript covariates.R
# Triangular kernel at 0.8, weights w, order 1 on each side; the coefficient of `treated` is the jump.
options(digits = 17)
set.seed(9)
number <- function(v) paste0('[', paste(sprintf('%.17g', v), collapse = ', '), ']')
n <- 400
x <- runif(n, -1, 1)
line <- sample(0:4, n, TRUE)
w <- 0.5 + runif(n)
a <- rnorm(n) + 0.3 * x
b <- rbinom(n, 1, 0.4)
treated <- as.numeric(x >= 0)
y <- 1 + 0.5 * x + 0.7 * treated + 0.6 * a - 0.8 * b + 0.4 * line + rnorm(n)
k <- w * pmax(0, 1 - abs(x) / 0.8)
keep <- k > 0
jump <- function(formula) {
  fit <- lm(formula, weights = k, subset = keep)
  c(coef(fit)['treated'], coef(fit)['a'], coef(fit)['b'])
}
plain <- jump(y ~ treated + x + treated:x + a + b)
lines <- jump(y ~ treated + x + treated:x + a + b + factor(line))
writeLines(paste0('{\n  "x": ', number(x), ',\n  "line": ', number(line), ',\n  "w": ', number(w), ',\n  "a": ', number(a),
  ',\n  "b": ', number(b), ',\n  "y": ', number(y), ',\n  "joint": ', number(plain), ',\n  "withLines": ', number(lines), '\n}'),
  'covariates.json')
