# Golden values for the comparison of lines, by dense matrix algebra, uniroot and integrate.
# Run: Rscript compare.R > compare.json      (R 4.2.2, base packages only)
# Estimates and covariances are invented; nothing is drawn at random.

number <- function(x) ifelse(is.na(x), "null", formatC(x, digits = 17, format = "g"))
array <- function(x) paste0("[", paste(number(as.vector(x)), collapse = ", "), "]")
field <- function(name, x) paste0("\"", name, "\": ", if (length(x) == 1) number(x) else array(x))
record <- function(...) paste0("{", paste(c(...), collapse = ",\n  "), "}")

root <- function(f, low, high) uniroot(f, c(low, high), tol = 1e-16, maxiter = 10000)$root

random_effects <- function(y, v, level = 0.95) {
  k <- length(y)
  at <- function(t2) { w <- 1 / (v + t2); mu <- sum(w * y) / sum(w); list(w = w, mu = mu, q = sum(w * (y - mu)^2)) }
  q <- at(0)$q
  w <- 1 / v
  dl <- max(0, (q - (k - 1)) / (sum(w) - sum(w^2) / sum(w)))
  # Restricted likelihood with the projection P = W - W1(1'W1)^-1 1'W: score = y'PPy - tr(P).
  score <- function(t2) {
    W <- diag(1 / (v + t2)); one <- rep(1, k)
    P <- W - W %*% one %*% solve(t(one) %*% W %*% one) %*% t(one) %*% W
    as.numeric(t(y) %*% P %*% P %*% y) - sum(diag(P))
  }
  loglik <- function(t2) {
    a <- at(t2)
    -0.5 * sum(log(v + t2)) - 0.5 * log(sum(a$w)) - 0.5 * a$q
  }
  grid <- c(0, exp(seq(log(1e-6 * min(v)), log(10 * (max(v) + diff(range(y))^2)), length.out = 4000)))
  best <- which.max(sapply(grid, loglik))
  reml <- if (best == 1) 0 else root(score, grid[best - 1], grid[best + 1])
  pm <- if (q <= k - 1) 0 else root(function(t2) at(t2)$q - (k - 1), 0, 10 * diff(range(y))^2)
  a <- at(reml)
  se <- sqrt(a$q / ((k - 1) * sum(a$w)))
  quant <- qt((1 + level) / 2, k - 1)
  reach <- quant * sqrt(reml + se^2)
  b <- v / (reml + v)
  shrunk <- (1 - b) * y + b * a$mu
  spread <- qnorm((1 + level) / 2) * sqrt(reml * v / (reml + v) + b^2 * se^2)
  record(field("estimate", y), field("variance", v), field("level", level), field("q", q),
    field("i_squared", max(0, 100 * (q - (k - 1)) / q)), field("dl", dl), field("reml", reml), field("pm", pm),
    field("mean", a$mu), field("standard_error", se), field("low", a$mu - quant * se), field("high", a$mu + quant * se),
    field("prediction_low", a$mu - reach), field("prediction_high", a$mu + reach),
    field("shrunken", shrunk), field("shrunken_low", shrunk - spread), field("shrunken_high", shrunk + spread))
}

y8 <- c(0.42, -0.15, 0.88, 0.31, 1.27, -0.64, 0.05, 0.59)
v8 <- c(0.031, 0.112, 0.054, 0.009, 0.240, 0.087, 0.018, 0.066)
y5 <- c(2.10, 2.15, 1.98, 2.05, 2.20)   # Q below its expectation: every tau squared is 0
v5 <- c(0.04, 0.02, 0.05, 0.03, 0.06)
y2 <- c(-1.5, 3.25)
v2 <- c(0.5, 0.125)
# Restricted likelihood with two maxima: a tight pair near each other, a loose pair far apart. Here the far one is higher …
y4 <- c(0, 0.2, 16, -16)
v4 <- c(0.01, 0.01, 30, 30)
# … and here the near one.
z4 <- c(0, 0.2, 14, -14)
# It falls from 0 and rises again to a lower maximum: 0 is the answer.
o4 <- c(0, 0.05, 12, -12)

# 13 BCG vaccine trials, Colditz et al. 1994: cases and others, vaccinated, then cases and others, not vaccinated.
bcg <- matrix(c(4, 119, 11, 128, 6, 300, 29, 274, 3, 228, 11, 209, 62, 13536, 248, 12619, 33, 5036, 47, 5761,
  180, 1361, 372, 1079, 8, 2537, 10, 619, 505, 87886, 499, 87892, 29, 7470, 45, 7232, 17, 1699, 65, 1600,
  186, 50448, 141, 27197, 5, 2493, 3, 2338, 27, 16886, 29, 17825), ncol = 4, byrow = TRUE)
n1 <- bcg[, 1] + bcg[, 2]
n2 <- bcg[, 3] + bcg[, 4]
y13 <- log((bcg[, 1] / n1) / (bcg[, 3] / n2))
v13 <- 1 / bcg[, 1] - 1 / n1 + 1 / bcg[, 3] - 1 / n2

# Correlated estimates: lines next to each other share units, and one common cluster effect.
k <- length(y8)
s8 <- sqrt(v8)
correlation <- outer(1:k, 1:k, function(a, b) ifelse(a == b, 1, 0.12 * cos(a * b) + 0.45^abs(a - b)))
correlation <- (correlation + t(correlation)) / 2
omega <- diag(s8) %*% correlation %*% diag(s8)
stopifnot(min(eigen(correlation)$values) > 0.01)
wald <- function(y, omega) {
  k <- length(y)
  D <- cbind(1, -diag(k - 1))
  d <- D %*% y
  as.numeric(t(d) %*% solve(D %*% omega %*% t(D)) %*% d)
}
statistic <- wald(y8, omega)

pairs <- t(combn(k, 2))
estimate <- y8[pairs[, 1]] - y8[pairs[, 2]]
se <- sqrt(v8[pairs[, 1]] + v8[pairs[, 2]] - 2 * omega[pairs])
p <- 2 * pnorm(-abs(estimate / se))

weights <- c(3, 1, 4, 1, 5, 9, 2, 6)
weights <- weights / sum(weights)
target <- sum(weights * y8)
target_se <- sqrt(as.numeric(t(weights) %*% omega %*% weights))

# Largest |t| over the three contrasts of three lines: d12, d13 and d23 = d13 - d12 are one bivariate normal.
coverage3 <- function(crit, omega) {
  A <- rbind(c(1, -1, 0), c(1, 0, -1), c(0, 1, -1))
  C <- A %*% omega %*% t(A)
  s <- sqrt(diag(C))
  slope <- C[2, 1] / C[1, 1]
  rest <- sqrt(C[2, 2] - slope * C[2, 1])
  f <- function(d12) sapply(d12, function(d) {
    low <- max(-crit * s[2], d - crit * s[3])
    high <- min(crit * s[2], d + crit * s[3])
    if (high <= low) return(0)
    dnorm(d, sd = s[1]) * (pnorm(high, slope * d, rest) - pnorm(low, slope * d, rest))
  })
  integrate(f, -crit * s[1], crit * s[1], rel.tol = 1e-11, subdivisions = 1000)$value
}
critical3 <- function(level, omega) root(function(crit) coverage3(crit, omega) - level, 1, 6)
# Equal variances and correlations: the range of k normals over sqrt(2), whatever the correlation.
critical_range <- function(level, k) root(function(crit) {
  r <- crit * sqrt(2)
  integrate(function(z) k * dnorm(z) * (pnorm(z) - pnorm(z - r))^(k - 1), -9, 9 + r, rel.tol = 1e-11,
    subdivisions = 1000)$value - level
}, 1, 7)
independent3 <- diag(c(1, 4, 0.09))
correlated3 <- diag(c(1, 2, 0.5)) %*% matrix(c(1, 0.8, -0.3, 0.8, 1, 0.1, -0.3, 0.1, 1), 3) %*% diag(c(1, 2, 0.5))

cat(record(
  paste0("\"random_effects\": [\n", paste(random_effects(y8, v8), random_effects(y5, v5), random_effects(y2, v2),
    random_effects(y4, v4), random_effects(z4, v4), random_effects(o4, v4),
    random_effects(y8 * 1e4, v8 * 1e8, 0.9), random_effects(y13, v13), sep = ",\n"), "]"),
  paste0("\"correlated\": ", record(field("estimate", y8), field("covariance", t(omega)), field("wald", statistic),
    field("wald_p", pchisq(statistic, k - 1, lower.tail = FALSE)),
    field("contrast_first", pairs[, 1] - 1), field("contrast_second", pairs[, 2] - 1),
    field("contrast_estimate", estimate), field("contrast_se", se), field("contrast_p", p),
    field("contrast_p_holm", p.adjust(p, "holm")), field("contrast_p_bh", p.adjust(p, "BH")),
    field("target_weights", weights), field("target", target), field("target_se", target_se),
    field("target_p", 2 * pnorm(-abs(target / target_se))))),
  paste0("\"critical\": ", record(field("independent3", independent3), field("independent3_95", critical3(0.95, independent3)),
    field("independent3_90", critical3(0.9, independent3)), field("correlated3", t(correlated3)),
    field("correlated3_95", critical3(0.95, correlated3)), field("range10_95", critical_range(0.95, 10)),
    field("range40_90", critical_range(0.9, 40)), field("range150_95", critical_range(0.95, 150))))), "\n", sep = "")
