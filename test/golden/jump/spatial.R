# The spatial variance against dense matrices of all pairs: base R only. Distances on WGS 84 by Vincenty's inverse (Vincenty
# 1975, Survey Review 23), iterated to the last bit; Conley 1999 with weights 1 - d/D.
# Run in this folder: Rscript spatial.R > spatial.json   (R 4.2.2)
options(digits = 17)
set.seed(1999)
n <- 260; D <- 800
metresEast <- 111412.84*cos(47*pi/180) - 93.5*cos(3*47*pi/180); metresNorth <- 111174
east <- round(runif(n, 0, 6000), 2); x <- round(runif(n, -1500, 1500), 3)
again <- sample(n, 12); east[again[1:6]] <- east[again[7:12]]; x[again[1:6]] <- x[again[7:12]]   # units at one place
lon <- round(8 + east/metresEast, 7); lat <- round(47 + x/metresNorth, 7)
lon[again[1:6]] <- lon[again[7:12]]; lat[again[1:6]] <- lat[again[7:12]]
treated <- as.numeric(x >= 0)
line <- pmin(5, floor(east/1000))
y <- round(0.3*line + 0.4*treated + x/2000 + sin(east/500) + cos(x/400 + east/700) + rnorm(n, 0, 0.4), 6)
w <- round(runif(n, 0.5, 2), 6)

vincenty <- function(lon1, lat1, lon2, lat2) {
  a <- 6378137; f <- 1/298.257223563; b <- (1 - f)*a; r <- pi/180
  if (lon1 == lon2 && lat1 == lat2) return(0)
  U1 <- atan((1 - f)*tan(lat1*r)); U2 <- atan((1 - f)*tan(lat2*r)); L <- (lon2 - lon1)*r; lambda <- L
  for (k in 1:60) {
    ss <- sqrt((cos(U2)*sin(lambda))^2 + (cos(U1)*sin(U2) - sin(U1)*cos(U2)*cos(lambda))^2)
    cs <- sin(U1)*sin(U2) + cos(U1)*cos(U2)*cos(lambda)
    s <- atan2(ss, cs); sa <- cos(U1)*cos(U2)*sin(lambda)/ss; c2 <- 1 - sa^2
    cm <- if (c2 == 0) 0 else cs - 2*sin(U1)*sin(U2)/c2
    C <- f/16*c2*(4 + f*(4 - 3*c2))
    old <- lambda
    lambda <- L + (1 - C)*f*sa*(s + C*ss*(cm + C*cs*(2*cm^2 - 1)))
    if (abs(lambda - old) < 1e-16) break
  }
  u2 <- c2*(a^2 - b^2)/b^2
  A <- 1 + u2/16384*(4096 + u2*(-768 + u2*(320 - 175*u2))); B <- u2/1024*(256 + u2*(-128 + u2*(74 - 47*u2)))
  ds <- B*ss*(cm + B/4*(cs*(2*cm^2 - 1) - B/6*cm*(4*ss^2 - 3)*(4*cm^2 - 3)))
  b*A*(s - ds)
}
dist <- matrix(0, n, n)
for (i in 2:n) for (j in 1:(i - 1)) dist[i, j] <- dist[j, i] <- vincenty(lon[i], lat[i], lon[j], lat[j])
near <- pmax(1 - dist/D, 0)
quad <- function(a, b) sum(a*(near %*% b))

kern <- list(triangular = function(u) pmax(0, 1 - abs(u)), epanechnikov = function(u) 0.75*pmax(0, 1 - u^2),
             uniform = function(u) 0.5*(abs(u) <= 1))
# l, l_bc and their residuals for a set of units, on values v
both <- function(units, v, order, kernel, h, b, wt) {
  K <- kern[[kernel]]; q <- order + 1
  l <- lb <- ep <- eb <- rep(0, n)
  for (s in 0:1) {
    i <- intersect(units, which(treated == s)); sg <- 2*s - 1
    fit <- function(o, h) {
      X <- outer(x[i]/h, 0:o, "^"); k <- wt[i]*K(x[i]/h)
      A <- solve(crossprod(X*sqrt(k)), t(X*k))
      list(A = A/h^(0:o), res = as.vector(v[i] - X %*% (A %*% v[i])))
    }
    P <- fit(order, h); B <- fit(q, b)
    l[i] <- sg*P$A[1, ]; lb[i] <- sg*(P$A[1, ] - sum(P$A[1, ]*x[i]^q)*B$A[q + 1, ])
    ep[i] <- P$res; eb[i] <- B$res
  }
  list(plain = sum(l*v), corrected = sum(lb*v), psi = l*ep, psib = lb*eb, dof = sum(l^2)^2/sum(l^4), dofb = sum(lb^2)^2/sum(lb^4))
}
summary_of <- function(o) list(plain = o$plain, corrected = o$corrected, plainVariance = quad(o$psi, o$psi),
  correctedVariance = quad(o$psib, o$psib), plainFreedom = o$dof, correctedFreedom = o$dofb)
freed <- function(order, kernel, h, wt) {        # y less the fixed effects of the joint fit at h
  k <- wt*kern[[kernel]](x/h)
  Z <- sapply(0:5, function(c) as.numeric(line == c)); X <- cbind(Z, treated)
  for (j in seq_len(order)) X <- cbind(X, treated*(x/h)^j, (1 - treated)*(x/h)^j)
  as.vector(y - Z %*% lm.wfit(X[k > 0, ], y[k > 0], k[k > 0])$coefficients[1:6])
}
whole <- list(); pooled <- list()
for (wt in list(rep(1, n), w)) for (order in 0:2) for (kernel in names(kern)) {
  head <- list(order = order, kernel = kernel, weighted = !all(wt == 1), h = 900, b = 1200)
  whole[[length(whole) + 1]] <- c(head, summary_of(both(1:n, y, order, kernel, 900, 1200, wt)))
  head$b <- 900
  pooled[[length(pooled) + 1]] <- c(head, summary_of(both(1:n, freed(order, kernel, 900, wt), order, kernel, 900, 900, wt)))
}
lines <- lapply(0:5, function(c) both(which(line == c), y, 1, "triangular", 1400, 1400, rep(1, n)))
omega <- outer(1:6, 1:6, Vectorize(function(a, b) quad(lines[[a]]$psib, lines[[b]]$psib)))

# Along: levels on both sides at points of the border, in metres east and north of each
degrees <- function(order) do.call(rbind, lapply(0:order, function(d) cbind(d:0, 0:d)))
at_point <- function(e0, order, h, b) {
  e <- (east - e0); v <- x; r <- sqrt(e^2 + v^2); q <- order + 1
  l <- lb <- ep <- eb <- rep(0, n)
  for (s in 0:1) {
    i <- which(treated == s); sg <- 2*s - 1
    fit <- function(o, h) {
      X <- apply(degrees(o), 1, function(d) (e[i]/h)^d[1]*(v[i]/h)^d[2]); k <- w[i]*pmax(0, 1 - r[i]/h)
      if (o == 0) X <- matrix(1, length(i), 1)
      A <- solve(crossprod(X*sqrt(k)), t(X*k))
      list(A = A, X = X, res = as.vector(y[i] - X %*% (A %*% y[i])))
    }
    P <- fit(order, h); B <- fit(q, b)
    last <- ((order + 1)*(order + 2)/2 + 1):((q + 1)*(q + 2)/2)
    response <- colSums(P$A[1, ]*B$X[, last])            # to terms in units of b
    l[i] <- sg*P$A[1, ]; lb[i] <- sg*(P$A[1, ] - colSums(response*B$A[last, ]))
    ep[i] <- P$res; eb[i] <- B$res
  }
  list(plain = sum(l*y), corrected = sum(lb*y), psi = l*ep, psib = lb*eb, dof = sum(l^2)^2/sum(l^4), dofb = sum(lb^2)^2/sum(lb^4))
}
places <- c(1500, 2300, 4200); lengths <- c(1000, 700, 1300)
points <- lapply(places, at_point, order = 1, h = 1300, b = 1400)
between <- outer(1:3, 1:3, Vectorize(function(a, b) quad(points[[a]]$psib, points[[b]]$psib)))
share <- lengths/sum(lengths)
stopifnot(min(eigen(omega)$values) > 0, min(eigen(between)$values) > 0)

num <- function(v) paste0("[", paste(sprintf("%.17g", v), collapse = ","), "]")
item <- function(v) {
  if (is.list(v)) return(paste0("{", paste(sprintf("\"%s\":%s", names(v), sapply(v, item)), collapse = ","), "}"))
  if (is.character(v)) return(sprintf("\"%s\"", v))
  if (is.logical(v)) return(tolower(v))
  sprintf("%.17g", v)
}
all <- function(cases) paste0("[\n", paste(sapply(cases, item), collapse = ",\n"), "]")
cat("{\"tool\":\"base R 4.2.2\",\"cutoffMetres\":", D, ",\n\"lon\":", num(lon), ",\n\"lat\":", num(lat), ",\n\"x\":", num(x),
    ",\n\"east\":", num(east), ",\n\"y\":", num(y), ",\n\"w\":", num(w), ",\n\"line\":", num(line),
    ",\n\"whole\":", all(whole), ",\n\"pooled\":", all(pooled),
    ",\n\"lines\":{\"h\":1400,\"corrected\":", num(sapply(lines, function(o) o$corrected)), ",\"covariance\":", num(omega),
    "},\n\"along\":{\"h\":1300,\"b\":1400,\"places\":", num(places), ",\"lengths\":", num(lengths), ",\"points\":",
    all(lapply(points, summary_of)), ",\n\"covariance\":", num(between), ",\"average\":", sprintf("%.17g", sum(share*sapply(points, function(o) o$corrected))),
    ",\"averageVariance\":", sprintf("%.17g", as.numeric(share %*% between %*% share)), "}}\n", sep = "")
