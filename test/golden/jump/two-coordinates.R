# One point of a border against weighted least squares in two coordinates with sandwich variances: base R only, dense
# matrices, terms in metres over h. The border bends at a right angle; the treated side is the quarter east and north of a corner.
# Run in this folder: Rscript two-coordinates.R > two-coordinates.json   (R 4.2.2)
options(digits = 17)
set.seed(20260102)
n <- 320
e <- round(runif(n, -900, 1100), 3)
v <- round(runif(n, -1000, 1000), 3)
treated <- e >= -250 & v >= 0
y <- round(2 + 0.8*e/1000 - 0.5*v/1000 + 0.6*(e/1000)^2 - 0.4*e*v/1e6 + 0.3*treated + rnorm(n, 0, 0.2*(1 + abs(e)/1000)), 6)
w <- round(runif(n, 0.4, 2.2), 6)
g <- sample(0:21, n, replace = TRUE)
r <- sqrt(e^2 + v^2)
kern <- list(triangular = function(u) pmax(0, 1 - u), epanechnikov = function(u) 0.75*pmax(0, 1 - u^2),
             uniform = function(u) 0.5*(u <= 1))
degrees <- function(order) do.call(rbind, lapply(0:order, function(d) cbind(d:0, 0:d)))
terms <- function(i, order, h) apply(degrees(order), 1, function(d) (e[i]/h)^d[1]*(v[i]/h)^d[2])
side_fit <- function(s, order, h, K, wt) {
  i <- which(treated == s)
  k <- wt[i]*K(r[i]/h)/h^2
  X <- terms(i, order, h)
  use <- k > 0
  fit <- lm.wfit(X[use, , drop = FALSE], y[i][use], k[use])
  XtX <- crossprod(X[use, , drop = FALSE]*sqrt(k[use]))
  A <- solve(XtX, t(X*k))
  lev <- rowSums((X %*% solve(XtX))*X)*k
  list(i = i, A = A, lev = lev, res = as.vector(y[i] - X %*% fit$coefficients), n = sum(use), k = k, coef = fit$coefficients)
}
one <- function(order, kernel, h, b, wt) {
  K <- kern[[kernel]]; q <- order + 1
  size <- function(o) (o + 1)*(o + 2)/2
  l <- lb <- lev <- levB <- fr <- frB <- resP <- resB <- rep(0, n); units <- c(); at <- c(); density <- 0
  for (s in c(FALSE, TRUE)) {
    sg <- if (s) 1 else -1
    P <- side_fit(s, order, h, K, wt); B <- side_fit(s, q, b, K, wt)
    a0 <- P$A[1, ]
    last <- (size(order) + 1):size(q)
    cc <- colSums(a0*terms(P$i, q, 1)[, last])          # response to the next terms, in metres
    abc <- a0 - colSums(cc*B$A[last, ]/b^q)
    l[P$i] <- sg*a0; lb[P$i] <- sg*abc
    resP[P$i] <- P$res; resB[P$i] <- B$res; lev[P$i] <- P$lev; levB[P$i] <- B$lev
    fr[P$i] <- P$n/(P$n - size(order)); frB[P$i] <- B$n/(B$n - size(q))
    units <- c(units, P$n); at <- c(at, P$coef[1]); density <- density + sum(P$k)
  }
  var_of <- function(l, e, lev, fr, ord) {
    active <- l != 0
    G <- length(unique(g[active])); na <- sum(active)
    cl <- G/(G - 1)*(na - 1)/(na - 2*size(ord))*sum(tapply(l*e, g, sum)^2)
    list(hc0 = sum(l^2*e^2), hc1 = sum(l^2*e^2*fr), hc2 = sum(l^2*e^2/(1 - lev)), hc3 = sum(l^2*e^2/(1 - lev)^2),
      clusters = cl, dof = sum(l^2)^2/sum(l^4), G = G)
  }
  list(order = order, kernel = kernel, h = h, b = b, weighted = !all(wt == 1), plain = sum(l*y), corrected = sum(lb*y),
    untreated = units[1], treated = units[2], levelUntreated = at[1], levelTreated = at[2], density = density,
    plainVariance = var_of(l, resP, lev, fr, order), correctedVariance = var_of(lb, resB, levB, frB, q))
}
# Bias-reduced clustered variance (CR2) and Satterthwaite degrees of freedom, identity working covariance, of the joint
# weighted regression of both sides at one bandwidth: every matrix in full.
reduced <- function(order, kernel, h, wt) {
  use <- r < h | (kernel == "uniform" & r == h)
  i <- which(use); k <- (wt*kern[[kernel]](r/h)/h^2)[i]
  X <- terms(i, order, h); X <- cbind(X*treated[i], X*(1 - treated[i]))
  size <- ncol(X)/2
  M <- solve(crossprod(X*sqrt(k)))
  A <- M %*% t(X*k)
  l <- A[1, ] - A[size + 1, ]
  N <- diag(length(i)) - X %*% A
  res <- as.vector(N %*% y[i])
  P <- c(); V <- 0
  for (cl in unique(g[i])) {
    own <- which(g[i] == cl)
    B <- tcrossprod(N[own, , drop = FALSE])
    ev <- eigen(B, symmetric = TRUE)
    root <- ifelse(ev$values > 1e-10, 1/sqrt(pmax(ev$values, 1e-300)), 0)
    Ag <- ev$vectors %*% (root*t(ev$vectors))
    u <- Ag %*% l[own]
    V <- V + sum(u*res[own])^2
    P <- cbind(P, t(N[own, , drop = FALSE]) %*% u)
  }
  G <- crossprod(P)
  list(order = order, kernel = kernel, h = h, weighted = !all(wt == 1), estimate = sum(l*y[i]), variance = V,
    dof = sum(diag(G))^2/sum(G^2), G = ncol(P))
}
few <- list()
for (wt in list(rep(1, n), w)) for (order in 1:3) for (kernel in names(kern))
  few[[length(few) + 1]] <- reduced(order, kernel, c(700, 900, 1000)[order], wt)
cases <- list()
for (wt in list(rep(1, n), w)) for (order in 0:2) for (kernel in names(kern)) for (b in c(900, 1000, 700))
  cases[[length(cases) + 1]] <- one(order, kernel, c(700, 900, 1000)[order + 1], max(b, 700 + 100*order), wt)
num <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")
item <- function(v) {
  if (is.list(v)) return(paste0("{", paste(sprintf("\"%s\":%s", names(v), sapply(v, item)), collapse = ","), "}"))
  if (is.character(v)) return(paste0("\"", v, "\""))
  if (is.logical(v)) return(tolower(as.character(v)))
  sprintf("%.17g", v)
}
cat("{\"tool\":\"base R 4.2.2\",\n\"east\":", num(e), ",\n\"north\":", num(v), ",\n\"treated\":", num(treated), ",\n\"y\":", num(y),
    ",\n\"w\":", num(w), ",\n\"cluster\":", num(g), ",\n\"cases\":[\n", paste(sapply(cases, item), collapse = ",\n"),
    "],\n\"few\":[\n", paste(sapply(few, item), collapse = ",\n"), "]}\n", sep = "")
