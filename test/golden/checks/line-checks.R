# Base R 4.2.2: Rscript line-checks.R > line-checks.json, in this folder.
# Values of the histogram test (McCrary 2008), the test for few values (Frandsen 2017), counts at round numbers against their
# neighbours, and an exact permutation test over all assignments, each from literal formulas on the data printed with it.
set.seed(20261201)
list_of <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")

# histogram: lm() for every fit
x <- c(rnorm(500, -0.4), abs(rnorm(60, 0.3, 0.2)))
n <- length(x)
width <- 2 * sd(x) / sqrt(n)
side <- function(v) {
  bin <- floor(abs(v) / width)
  heights <- as.vector(table(factor(bin, levels = 0:max(bin)))) / n / width
  middle <- (0:max(bin) + 0.5) * width
  quartic <- lm(heights ~ poly(middle, 4, raw = TRUE))
  b <- unname(coef(quartic))
  second <- 2 * b[3] + 6 * b[4] * middle + 12 * b[5] * middle^2
  length <- length(middle) * width
  list(heights = heights, middle = middle, length = length,
       h = min(length, 3.348 * (summary(quartic)$sigma^2 * length / sum(second^2))^0.2))
}
left <- side(x[x < 0]); right <- side(x[x >= 0])
h <- min((left$h + right$h) / 2, left$length, right$length)
at0 <- function(s) unname(coef(lm(s$heights ~ s$middle, weights = pmax(0, 1 - s$middle / h)))[1])
f <- c(at0(left), at0(right))
se <- sqrt(24 / 5 * sum(1 / f) / (n * h))

# few values
score <- c(rep(-3, 30), rep(-2, 41), rep(-1, 38), rep(0, 70), rep(1, 44), rep(2, 35), rep(3, 20))
k <- 1 / (2 * var(score))
counts <- as.vector(table(factor(score, levels = -1:1)))
total <- sum(counts)
p_few <- function(k) min(1, 2 * min(pbinom(counts[2], total, (1 - k) / (3 - k)),
  pbinom(counts[2] - 1, total, (1 + k) / (3 + k), lower.tail = FALSE)))

# round numbers: whole scores, some moved to the nearest multiple of 5
whole <- round(rnorm(600, 50, 12))
moved <- runif(600) < 0.1
whole[moved] <- 5 * round(whole[moved] / 5)
count <- function(v) sum(whole == v)
at_round <- function(every) {
  at <- seq(every * ceiling(min(whole) / every), max(whole), by = every)
  at <- at[at - 2 >= min(whole) & at + 2 <= max(whole)]
  here <- sapply(at, count)
  mean4 <- sapply(at, function(v) (count(v - 2) + count(v - 1) + count(v + 1) + count(v + 2)) / 4)
  mean5 <- (here + 4 * mean4) / 5
  c(sum(here), sum(mean4), (sum(here) - sum(mean4)) / sqrt(sum(mean5) * 1.25))
}

# permutations: all choose(12, 6) assignments
y <- round(c(rnorm(6, 0), rnorm(6, 1)), 2)
ways <- combn(12, 6)
exact <- function(v) {
  all <- apply(ways, 2, function(i) mean(v[i]) - mean(v[-i]))
  seen <- mean(v[7:12]) - mean(v[1:6])
  c(seen, mean(abs(all) >= abs(seen) - 1e-9))
}

cat("{\n",
  '"histogram": {"x":', list_of(x), ', "width":', list_of(width), ', "bandwidth":', list_of(h), ', "densities":', list_of(f),
  ', "log_difference":', list_of(log(f[2] / f[1])), ', "standard_error":', list_of(se), "},\n",
  '"few_values": {"x":', list_of(score), ', "curvature":', list_of(k), ', "p":', list_of(c(p_few(k), p_few(0), p_few(0.3))), "},\n",
  '"round": {"scores":', list_of(whole), ', "at_5":', list_of(at_round(5)), ', "at_10":', list_of(at_round(10)), "},\n",
  '"permutations": {"y":', list_of(y), ', "means":', list_of(exact(y)), ', "ranks":', list_of(exact(rank(y))), "},\n",
  '"binomial": {"count": [40, 5, 900], "trials": [100, 50, 1000], "chance": [0.3, 0.2, 0.5], "tail":',
  list_of(pbinom(c(39, 4, 899), c(100, 50, 1000), c(0.3, 0.2, 0.5), lower.tail = FALSE)), "}\n}\n", sep = "")
