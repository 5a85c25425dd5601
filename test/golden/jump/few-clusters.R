# Bias-reduced clustered variances and Satterthwaite degrees of freedom of the jump, from one weighted regression of both
# sides, with and without one dummy per line, by the package clubSandwich 0.5.8 (Debian r-cran-clubsandwich) on lm fits.
# Run in this folder: Rscript few-clusters.R > few-clusters.json   (R 4.2.2)
suppressMessages(library(clubSandwich))
options(digits = 17)
set.seed(20260103)
n <- 260; L <- 10
line <- sample(0:(L - 1), n, replace = TRUE, prob = 1:L)
x <- round(runif(n, -1, 1), 6)
treated <- as.numeric(x >= 0)
clusters <- list(
  straddling = sample(c(0:11, rep(3, 6), rep(7, 12)), n, replace = TRUE),        # unequal, across lines and sides
  sided = ifelse(treated == 1, 5, 0) + sample(0:4, n, replace = TRUE),           # each on one side
  within = 3*line + sample(0:2, n, replace = TRUE),                              # each in one line
  whole = line %/% 2,                                                            # of whole lines
  lines = line)
shock <- rnorm(12, 0, 0.3)[clusters$straddling + 1]
y <- round(line*0.4 + 0.5*treated + x - 0.4*x*treated + shock + rnorm(n, 0, 0.3*(1 + abs(x))), 6)
w <- round(runif(n, 0.5, 2), 6)
kern <- list(triangular = function(u) pmax(0, 1 - abs(u)), epanechnikov = function(u) 0.75*pmax(0, 1 - u^2),
             uniform = function(u) 0.5*(abs(u) <= 1))
one <- function(order, kernel, weighted, by, fixed, hu, ht) {
  h <- ifelse(treated == 1, ht, hu)
  k <- kern[[kernel]](x/h)/h*(if (weighted) w else 1)
  use <- k > 0
  X <- cbind(jump = treated, sapply(seq_len(order), function(j) treated*x^j), sapply(seq_len(order), function(j) (1 - treated)*x^j))
  data <- data.frame(y = y, X, level = factor(line), k = k)[use, ]
  terms <- setdiff(names(data), c("y", "level", "k"))
  fit <- lm(reformulate(c(terms, if (fixed) "level"), "y"), data, weights = k)
  V <- vcovCR(fit, cluster = clusters[[by]][use], type = "CR2")
  test <- coef_test(fit, V, test = "Satterthwaite", coefs = "jump")
  sprintf("{\"order\":%d,\"kernel\":\"%s\",\"weighted\":%s,\"by\":\"%s\",\"fixed\":%s,\"untreated\":%g,\"treated\":%g,\"estimate\":%.17g,\"variance\":%.17g,\"freedom\":%.17g,\"clusters\":%d}",
    order, kernel, tolower(weighted), by, tolower(fixed), hu, ht, coef(fit)[["jump"]], V["jump", "jump"], test$df_Satt,
    length(unique(clusters[[by]][use])))
}
cases <- c()
for (fixed in c(FALSE, TRUE)) for (by in names(clusters)) for (order in 1:2) for (kernel in names(kern)) for (weighted in c(FALSE, TRUE)) {
  if (weighted == (kernel != "triangular")) next
  cases <- c(cases, one(order, kernel, weighted, by, fixed, 0.8, if (kernel == "uniform") 0.8 else 0.6))
}
num <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")
cat("{\"tool\":\"clubSandwich ", as.character(packageVersion("clubSandwich")), ", R 4.2.2\",\n\"x\":", num(x), ",\n\"y\":", num(y), ",\n\"w\":", num(w),
    ",\n\"line\":", num(line), ",\n\"clusterCodes\":{", paste(sprintf("\"%s\":%s", names(clusters), sapply(clusters, num)), collapse = ",\n"),
    "},\n\"cases\":[\n", paste(cases, collapse = ",\n"), "]}\n", sep = "")
