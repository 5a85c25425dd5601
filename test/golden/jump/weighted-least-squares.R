# One line against weighted least squares with sandwich variances: base R only, dense matrices, signed x.
# Run in this folder: Rscript weighted-least-squares.R > weighted-least-squares.json   (R 4.2.2)
options(digits = 17)
set.seed(20260101)
n <- 240
x <- round(c(runif(n/2, -1, 0), runif(n/2, 0, 1.3)), 6)
treated <- x >= 0
y <- round(1.2 + 0.8*x - 0.5*x^2 + 0.4*treated + 0.3*x*treated + rnorm(n, 0, 0.2*(1 + abs(x))), 6)
w <- round(runif(n, 0.4, 2.2), 6)
g <- sample(0:17, n, replace = TRUE)
kern <- list(triangular = function(u) pmax(0, 1 - abs(u)), epanechnikov = function(u) 0.75*pmax(0, 1 - u^2),
             uniform = function(u) 0.5*(abs(u) <= 1))
side_fit <- function(s, order, h, K, wt) {
  i <- which(treated == s)
  k <- wt[i]*K(x[i]/h)/h
  X <- outer(x[i]/h, 0:order, `^`)
  use <- k > 0
  fit <- lm.wfit(X[use, , drop = FALSE], y[i][use], k[use])
  XtX <- crossprod(X[use, , drop = FALSE]*sqrt(k[use]))
  A <- solve(XtX, t(X*k))               # row nu: weights a_{nu,i} in units of (x/h)^nu
  lev <- rowSums((X %*% solve(XtX))*X)*k
  res <- y[i] - X %*% fit$coefficients
  list(i = i, A = A, lev = lev, res = as.vector(res), n = sum(use), k = k, coef = fit$coefficients)
}
nearest <- function(s) {
  i <- which(treated == s)
  sapply(i, function(a) {
    others <- setdiff(i, a)
    gap <- abs(x[others] - x[a])
    near <- others[gap <= sort(gap)[3]]
    m <- length(near)
    sqrt(m/(m + 1))*(y[a] - mean(y[near]))
  })
}
one <- function(order, kernel, h, b, wt) {
  K <- kern[[kernel]]; q <- order + 1
  l <- lb <- rep(0, n); eP <- eB <- list(hc0 = rep(0, n)); lev <- levB <- rep(0, n); fr <- frB <- rep(0, n); nn <- rep(0, n)
  resP <- resB <- rep(0, n)
  for (s in c(FALSE, TRUE)) {
    sg <- if (s) 1 else -1
    P <- side_fit(s, order, h, K, wt); B <- side_fit(s, q, b, K, wt)
    a0 <- P$A[1, ]
    cc <- sum(a0*x[P$i]^(order + 1))
    abc <- a0 - cc*B$A[q + 1, ]/b^(order + 1)
    l[P$i] <- sg*a0; lb[P$i] <- sg*abc
    resP[P$i] <- P$res; resB[P$i] <- B$res; lev[P$i] <- P$lev; levB[P$i] <- B$lev
    fr[P$i] <- P$n/(P$n - order - 1); frB[P$i] <- B$n/(B$n - q - 1)
    nn[P$i] <- nearest(s)
  }
  var_of <- function(l, e, lev, fr, ord) {
    active <- l != 0
    G <- length(unique(g[active])); na <- sum(active); k <- 2*(ord + 1)
    cl <- G/(G - 1)*(na - 1)/(na - k)*sum(tapply(l*e, g, sum)^2)
    c(hc0 = sum(l^2*e^2), hc1 = sum(l^2*e^2*fr), hc2 = sum(l^2*e^2/(1 - lev)), hc3 = sum(l^2*e^2/(1 - lev)^2),
      neighbours = sum(l^2*nn^2), clusters = cl, dof = sum(l^2)^2/sum(l^4), G = G)
  }
  c(list(order = order, kernel = kernel, h = h, b = b, weighted = !all(wt == 1), plain = sum(l*y), corrected = sum(lb*y)),
    list(plainVariance = as.list(var_of(l, resP, lev, fr, order)), correctedVariance = as.list(var_of(lb, resB, levB, frB, q))))
}
cases <- list()
for (wt in list(rep(1, n), w)) for (order in 0:3) for (kernel in names(kern))
  cases[[length(cases) + 1]] <- one(order, kernel, c(0.9, 0.6, 0.8, 0.95)[order + 1], c(0.9, 0.85, 0.7, 1.1)[order + 1], wt)
num <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")
item <- function(v) {
  if (is.list(v)) return(paste0("{", paste(sprintf("\"%s\":%s", names(v), sapply(v, item)), collapse = ","), "}"))
  if (is.character(v)) return(paste0("\"", v, "\""))
  if (is.logical(v)) return(tolower(as.character(v)))
  sprintf("%.17g", v)
}
cat("{\"tool\":\"base R 4.2.2\",\n\"x\":", num(x), ",\n\"y\":", num(y), ",\n\"w\":", num(w), ",\n\"cluster\":", num(g), ",\n\"cases\":[\n",
    paste(sapply(cases, item), collapse = ",\n"), "]}\n", sep = "")
