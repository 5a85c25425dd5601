# Slopes of effects in an attribute by dense matrix algebra, base R 4.2.2. Run in this folder: Rscript slope.R
# bcg: 13 trials (Colditz et al. 1994), restricted likelihood maximised by optimise, Knapp-Hartung standard error.
# shared: 8 lines whose estimates covary; tau squared solves y'PPy = tr(PP(Omega + tau2 I)), P of the weights 1/(v + tau2).
options(digits = 17)
number <- function(v) paste0('[', paste(sprintf('%.17g', v), collapse = ', '), ']')
parts <- function(v, X, t2) {
  W <- diag(1 / (v + t2))
  A <- solve(t(X) %*% W %*% X) %*% t(X) %*% W
  list(W = W, A = A, P = W - W %*% X %*% A)
}
answer <- function(y, X, v, Omega, t2) {
  with(parts(v, X, t2), {
    V <- Omega + t2 * diag(length(y))
    se <- sqrt((A %*% V %*% t(A))[2, 2])
    kh <- se * sqrt(as.numeric(t(y) %*% P %*% y) / sum(diag(P %*% V)))
    b <- as.vector(A %*% y)
    reach <- qt(0.975, length(y) - 2) * kh
    c(b[2], b[1], t2, se, kh, b[2] - reach, b[2] + reach, 2 * pt(-abs(b[2] / kh), length(y) - 2))
  })
}
y <- c(-0.8893113339, -1.5853886572, -1.3480731483, -1.44155119, -0.2175473222, -0.7861155858, -1.6208982236, 0.0119523335,
  -0.4694176487, -1.3713448035, -0.3393588283, 0.4459134006, -0.0173139482)
v <- c(0.325584765, 0.1945811214, 0.4153679654, 0.0200100319, 0.0512101722, 0.0069056185, 0.2230172476, 0.0039615793,
  0.0564342105, 0.0730247936, 0.012412214, 0.5325058452, 0.0714046597)
X <- cbind(1, c(44, 55, 42, 52, 13, 44, 19, 13, 27, 42, 18, 33, 33))
likelihood <- function(t2) with(parts(v, X, t2),
  -0.5 * (sum(log(v + t2)) + log(det(t(X) %*% W %*% X)) + as.numeric(t(y) %*% P %*% y)))
bcg <- answer(y, X, v, diag(v), optimise(likelihood, c(0, 1), maximum = TRUE, tol = 1e-14)$maximum)

set.seed(11)
n <- 8
B <- matrix(rnorm(n * 5), n) * 0.3
Omega <- B %*% t(B) + diag(0.05 + 0.1 * runif(n))
x <- c(1, 2, 4, 5, 7, 8, 11, 13)
effects <- 0.4 + 0.1 * x + rnorm(n, sd = 0.6) + as.vector(t(chol(Omega)) %*% rnorm(n))
XX <- cbind(1, x)
excess <- function(t2) with(parts(diag(Omega), XX, t2),
  as.numeric(t(effects) %*% P %*% P %*% effects) - sum(diag(P %*% P %*% (Omega + t2 * diag(n)))))
shared <- answer(effects, XX, diag(Omega), Omega, uniroot(excess, c(1e-8, 5), tol = 1e-15)$root)
writeLines(paste0('{\n  "bcg": ', number(bcg), ',\n  "attribute": ', number(x), ',\n  "effects": ', number(effects),
  ',\n  "omega": ', number(as.vector(Omega)), ',\n  "shared": ', number(shared), '\n}'), 'slope.json')
