# Universal kriging and restricted likelihood by plain dense algebra, to settle what another program computes.
EARTH_RADIUS_KM <- 6371.0088

chord_positions_km <- function(lon, lat) {
  r <- pi / 180
  EARTH_RADIUS_KM * cbind(x = cos(lat * r) * cos(lon * r), y = cos(lat * r) * sin(lon * r), z = sin(lat * r))
}

cross_distance <- function(a, b) {
  squares <- 0
  for (k in seq_len(ncol(a))) squares <- squares + outer(a[, k], b[, k], "-")^2
  sqrt(squares)
}

correlation <- function(family, h, range) {
  t <- h / range
  switch(family,
    exponential = exp(-t),
    matern32 = (1 + sqrt(3) * t) * exp(-sqrt(3) * t),
    matern52 = (1 + sqrt(5) * t + 5 * t^2 / 3) * exp(-sqrt(5) * t),
    spherical = ifelse(t < 1, 1 - 1.5 * t + 0.5 * t^3, 0))
}

# parameters: range, sill, nugget; error: known variances; target: "site" (nugget in) or "field".
dense_kriging <- function(family, parameters, x, F, z, error, x0, F0, target) {
  C <- parameters$sill * correlation(family, cross_distance(x, x), parameters$range)
  V <- C + diag(parameters$nugget + error)
  c0 <- parameters$sill * correlation(family, cross_distance(x, x0), parameters$range)
  Vi <- solve(V)
  A <- solve(t(F) %*% Vi %*% F)
  beta <- A %*% t(F) %*% Vi %*% z
  u <- t(F0) - t(F) %*% Vi %*% c0
  c00 <- parameters$sill + if (target == "site") parameters$nugget else 0
  list(mean = as.vector(F0 %*% beta + t(c0) %*% Vi %*% (z - F %*% beta)),
       variance = c00 - colSums(c0 * (Vi %*% c0)) + colSums(u * (A %*% u)),
       beta = as.vector(beta), beta_se = sqrt(diag(A)))
}

# Mean over the points of one block: averaged c0 and f0, mean of all pairwise covariances, no nugget.
dense_block <- function(family, parameters, x, F, z, error, points, f0,
                        weights = rep(1 / nrow(points), nrow(points))) {
  V <- parameters$sill * correlation(family, cross_distance(x, x), parameters$range) + diag(parameters$nugget + error)
  c0 <- parameters$sill * correlation(family, cross_distance(x, points), parameters$range) %*% weights
  c00 <- parameters$sill *
    sum(outer(weights, weights) * correlation(family, cross_distance(points, points), parameters$range))
  Vi <- solve(V)
  A <- solve(t(F) %*% Vi %*% F)
  beta <- A %*% t(F) %*% Vi %*% z
  u <- f0 - t(F) %*% Vi %*% c0
  list(mean = as.numeric(sum(f0 * beta) + t(c0) %*% Vi %*% (z - F %*% beta)),
       variance = as.numeric(c00 - t(c0) %*% Vi %*% c0 + t(u) %*% A %*% u))
}

# Our log-likelihoods: restricted (with the half log determinant of F'F added) and full, at given parameters.
dense_loglik <- function(family, parameters, x, F, z) {
  n <- nrow(F); p <- ncol(F)
  V <- parameters$sill * correlation(family, cross_distance(x, x), parameters$range) + diag(parameters$nugget, n)
  Vi <- solve(V)
  A <- t(F) %*% Vi %*% F
  r <- z - F %*% solve(A, t(F) %*% Vi %*% z)
  q <- as.numeric(t(r) %*% Vi %*% r)
  logdet <- function(M) as.numeric(determinant(M)$modulus)
  list(reml = -0.5 * ((n - p) * log(2 * pi) - logdet(t(F) %*% F) + logdet(V) + logdet(A) + q),
       ml = -0.5 * (n * log(2 * pi) + logdet(V) + q),
       half_logdet_FtF = 0.5 * logdet(t(F) %*% F))
}
