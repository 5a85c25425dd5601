# Pooled jump with line fixed effects against dense least squares with one dummy per line: base R only.
# Run in this folder: Rscript pooled-fixed-effects.R > pooled-fixed-effects.json   (R 4.2.2)
options(digits = 17)
set.seed(77)
n <- 300; L <- 9
line <- sample(0:(L - 1), n, replace = TRUE)
x <- round(runif(n, -1, 1), 6)
treated <- as.numeric(x >= 0)
y <- round(line*0.7 + 0.5*treated + x - 0.4*x*treated + rnorm(n, 0, 0.3), 6)
w <- round(runif(n, 0.5, 2), 6)
kern <- list(triangular = function(u) pmax(0, 1 - abs(u)), epanechnikov = function(u) 0.75*pmax(0, 1 - u^2),
             uniform = function(u) 0.5*(abs(u) <= 1))
cases <- c()
for (order in 0:3) for (kernel in names(kern)) for (weighted in c(FALSE, TRUE)) {
  hu <- 0.7; ht <- 0.5
  h <- ifelse(treated == 1, ht, hu)
  k <- kern[[kernel]](x/h)/h*(if (weighted) w else 1)
  use <- k > 0
  D <- sapply(0:(L - 1), function(c) as.numeric(line == c))
  X <- cbind(D, treated)
  for (j in seq_len(order)) X <- cbind(X, treated*x^j, (1 - treated)*x^j)
  fit <- lm.wfit(X[use, ], y[use], k[use])
  share <- tapply(k, factor(line, 0:(L - 1)), sum)/sum(k)
  cases <- c(cases, sprintf("{\"order\":%d,\"kernel\":\"%s\",\"weighted\":%s,\"untreated\":%g,\"treated\":%g,\"jump\":%.17g,\"shares\":[%s]}",
    order, kernel, tolower(weighted), hu, ht, fit$coefficients[L + 1], paste(sprintf("%.17g", share), collapse = ",")))
}
num <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")
cat("{\"tool\":\"base R 4.2.2\",\n\"x\":", num(x), ",\n\"y\":", num(y), ",\n\"w\":", num(w), ",\n\"line\":", num(line), ",\n\"cases\":[\n",
    paste(cases, collapse = ",\n"), "]}\n", sep = "")
