# Variances clustered two ways (Cameron, Gelbach & Miller 2011), V_1 + V_2 - V_12, each with its own factor
# G/(G-1)*(n-1)/(n-k), of the plain and corrected jump; covariance of two lines' corrected jumps. Base R, dense matrices.
# Run in this folder: Rscript two-way-clusters.R > two-way-clusters.json   (R 4.2.2)
options(digits = 17)
set.seed(20260104)
n <- 400
x <- round(runif(n, -1, 1), 6)
treated <- x >= 0
first <- sample(c(0, 2, 3, 5, 8, 9), n, replace = TRUE)      # codes with holes
second <- sample(0:13, n, replace = TRUE)
line <- sample(0:1, n, replace = TRUE)
y <- round(0.5*treated + x + rnorm(10, 0, 0.4)[first + 1] + rnorm(14, 0, 0.4)[second + 1] + rnorm(n, 0, 0.3), 6)
w <- round(runif(n, 0.5, 2), 6)
K <- function(u) pmax(0, 1 - abs(u))
h <- 0.7; b <- 0.9
# l and residuals of both estimates, zero outside `use`
weights_of <- function(use) {
  l <- lb <- e <- eb <- rep(0, n)
  for (s in c(FALSE, TRUE)) {
    i <- which(use & treated == s); sg <- if (s) 1 else -1
    side <- function(order, a) {
      k <- w[i]*K(x[i]/a)
      X <- outer(x[i], 0:order, "^")
      A <- solve(t(X) %*% diag(k) %*% X, t(X*k))
      list(A = A, residual = as.vector(y[i] - X %*% (A %*% y[i])))
    }
    P <- side(1, h); B <- side(2, b)
    a0 <- P$A[1, ]
    l[i] <- sg*a0; e[i] <- P$residual
    lb[i] <- sg*(a0 - sum(a0*x[i]^2)*B$A[3, ]); eb[i] <- B$residual
  }
  list(plain = list(l = l, e = e, k = 4), corrected = list(l = lb, e = eb, k = 6))
}
by <- function(codes) 1*outer(codes, codes, "==")
both <- 100*first + second
cov_of <- function(p, q) {
  total <- 0
  for (part in list(list(first, 1), list(second, 1), list(both, -1))) {
    factor_of <- function(z) { near <- z$l != 0; G <- length(unique(part[[1]][near])); m <- sum(near); G/(G - 1)*(m - 1)/(m - z$k) }
    total <- total + part[[2]]*sqrt(factor_of(p)*factor_of(q))*as.numeric(t(p$l*p$e) %*% by(part[[1]]) %*% (q$l*q$e))
  }
  total
}
all <- weights_of(rep(TRUE, n)); a <- weights_of(line == 0); c <- weights_of(line == 1)
num <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")
cat("{\"tool\":\"base R 4.2.2\",\n\"h\":", h, ",\"b\":", b, ",\n\"x\":", num(x), ",\n\"y\":", num(y), ",\n\"w\":", num(w), ",\n\"line\":", num(line),
    ",\n\"first\":", num(first), ",\n\"second\":", num(second),
    ",\n\"plain\":", num(c(sum(all$plain$l*y), cov_of(all$plain, all$plain))),
    ",\n\"corrected\":", num(c(sum(all$corrected$l*y), cov_of(all$corrected, all$corrected))),
    ",\n\"lines\":", num(c(cov_of(a$corrected, a$corrected), cov_of(a$corrected, c$corrected), cov_of(c$corrected, c$corrected))), "}\n", sep = "")
