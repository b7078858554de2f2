# Universal kriging by gstat at fixed parameters; every value is checked against dense algebra before it is
# written. Run: Rscript scripts/reference/gstat.R
suppressMessages({library(sp); library(gstat)})
source("scripts/reference/to-json.R")
source("scripts/reference/dense.R")

GSTAT_FAMILY <- c(exponential = "Exp", spherical = "Sph", matern32 = "Mat")

# Our parameters as a gstat model. Nugget as structure ("Nug": target site) or as error ("Err": target field).
gstat_model <- function(family, parameters, nugget_as) {
  range <- if (family == "matern32") parameters$range / sqrt(3) else parameters$range
  vgm(parameters$sill, GSTAT_FAMILY[[family]], range, kappa = 1.5,
      add.to = if (parameters$nugget > 0) vgm(parameters$nugget, nugget_as, 0))
}

spatial <- function(x, F, value = NULL) {
  columns <- as.data.frame(F)
  names(columns) <- paste0("f", seq_len(ncol(F)))
  if (!is.null(value)) columns$value <- value
  SpatialPointsDataFrame(SpatialPoints(x), columns)
}

trend_formula <- function(F) as.formula(paste("value ~ 0 +", paste0("f", seq_len(ncol(F)), collapse = " + ")))

# A known error variance of 0 everywhere is written by leaving the weights out.
gstat_predict <- function(model, data, error, places, formula, block = NULL) {
  arguments <- list(formula = formula, locations = data, newdata = places, model = model, debug.level = 0)
  if (any(error > 0)) arguments$weights <- 1 / error
  if (!is.null(block)) arguments$block <- block
  do.call(krige, arguments)
}

worst <- 0
check <- function(ours, theirs, what, tolerance = 1e-10) {
  difference <- max(abs(ours - theirs))
  worst <<- max(worst, difference)
  if (!(difference <= tolerance)) stop(what, ": gstat and dense algebra differ by ", difference)
}

kriging_case <- function(name, family, parameters, x, F, z, error, x0, F0) {
  result <- list(name = name, family = family, rangeKm = parameters$range, sill = parameters$sill,
                 nugget = parameters$nugget, knownErrors = any(error > 0))
  for (target in c("site", "field")) {
    model <- gstat_model(family, parameters, if (target == "site") "Nug" else "Err")
    got <- gstat_predict(model, spatial(x, F, z), error, spatial(x0, F0), trend_formula(F))
    dense <- dense_kriging(family, parameters, x, F, z, error, x0, F0, target)
    check(dense$mean, got$var1.pred, paste(name, target, "mean"))
    check(dense$variance, got$var1.var, paste(name, target, "variance"))
    result$mean <- got$var1.pred # the same for both targets, as checked against dense algebra
    result[[paste0(target, "Se")]] <- sqrt(got$var1.var)
  }
  result
}

# One block: its discretising points as offsets from the first one; the trend at the block is the points' weighted mean.
block_case <- function(name, family, parameters, x, F, z, error, points, F0,
                       weights = rep(1 / nrow(points), nrow(points))) {
  f0 <- colSums(weights * F0)
  centre <- spatial(points[1, , drop = FALSE], t(f0))
  offsets <- as.data.frame(sweep(points, 2, points[1, ]))
  names(offsets) <- c("x", "y", "z")[seq_len(ncol(points))]
  offsets$weights <- weights
  got <- gstat_predict(gstat_model(family, parameters, "Nug"), spatial(x, F, z), error, centre, trend_formula(F), offsets)
  dense <- dense_block(family, parameters, x, F, z, error, points, f0, weights)
  check(dense$mean, got$var1.pred, paste(name, "block mean"))
  check(dense$variance, got$var1.var, paste(name, "block variance"))
  list(name = name, family = family, rangeKm = parameters$range, sill = parameters$sill, nugget = parameters$nugget,
       knownErrors = any(error > 0), mean = got$var1.pred, se = sqrt(got$var1.var))
}

# Colorado: chordal 3-D coordinates in km; trend 1, P1 = sin(latitude), elevation in km; known errors.
st <- read_columns("colorado.json", "stations")
at <- read_columns("colorado.json", "places")
trend <- function(p) unname(cbind(1, sin(p$latDeg * pi / 180), p$elevationM / 1000))
x <- chord_positions_km(st$lonDeg, st$latDeg)
x0 <- chord_positions_km(at$lonDeg, at$latDeg)
colorado <- function(name, family, parameters, error = st$errorVariance)
  kriging_case(name, family, parameters, x, trend(st), st$value, error, x0, trend(at))
none <- rep(0, length(st$value))
colorado_cases <- list(
  colorado("colorado-exponential", "exponential", list(range = 120, sill = 1.4, nugget = 0.35)),
  colorado("colorado-spherical", "spherical", list(range = 260, sill = 1.1, nugget = 0.4)),
  colorado("colorado-matern32", "matern32", list(range = 90, sill = 1.2, nugget = 0.45)),
  colorado("colorado-exponential-no-nugget", "exponential", list(range = 150, sill = 2.2, nugget = 0)),
  colorado("colorado-matern32-no-errors", "matern32", list(range = 140, sill = 1.6, nugget = 0.5), none))

# The block is the 64 points of a 0.5 degree square; heights from the nearest place, so that they are real ones.
# (A power of two: gstat keeps the points' weights in single precision, and 1/64 is exact there; with 36 points
# its mean was 1e-8 away from dense algebra.)
square <- expand.grid(lonDeg = seq(-106.5, -106, length.out = 8), latDeg = seq(38.5, 39, length.out = 8))
nearest <- apply(cross_distance(chord_positions_km(square$lonDeg, square$latDeg), x0), 1, which.min)
square$elevationM <- at$elevationM[nearest]
colorado_block <- function(name, family, parameters, ...)
  block_case(name, family, parameters, x, trend(st), st$value, st$errorVariance,
             chord_positions_km(square$lonDeg, square$latDeg), trend(square), ...)
# Weights of 128ths (exact in single precision) that grow from west to east: the sum is 1.
square_weights <- rep(c(0.5, 0.5, 0.5, 0.5, 1, 1, 2, 2), 8) / 64
stopifnot(sum(square_weights) == 1)
colorado_blocks <- list(
  colorado_block("colorado-block-exponential", "exponential", list(range = 120, sill = 1.4, nugget = 0.35)),
  colorado_block("colorado-block-spherical", "spherical", list(range = 260, sill = 1.1, nugget = 0.4)))
colorado_weighted_blocks <- list(
  colorado_block("colorado-block-weighted-exponential", "exponential", list(range = 120, sill = 1.4, nugget = 0.35),
                 square_weights),
  colorado_block("colorado-block-weighted-matern32", "matern32", list(range = 90, sill = 1.2, nugget = 0.45),
                 square_weights))

# Meuse: planar distances in km; trend 1 and the square root of the distance to the river, or 1 alone.
ms <- read_columns("meuse.json", "stations")
ma <- read_columns("meuse.json", "places")
meuse_x <- cbind(x = ms$xKm, y = ms$yKm)
meuse_case <- function(name, family, parameters, F = cbind(1, ms$sqrtDist), F0 = cbind(1, ma$sqrtDist))
  kriging_case(name, family, parameters, meuse_x, F, ms$value, 0 * ms$value, cbind(x = ma$xKm, y = ma$yKm), F0)
meuse_cases <- list(
  meuse_case("meuse-exponential", "exponential", list(range = 0.35, sill = 0.16, nugget = 0.06)),
  meuse_case("meuse-spherical", "spherical", list(range = 0.9, sill = 0.15, nugget = 0.08)),
  meuse_case("meuse-matern32", "matern32", list(range = 0.4, sill = 0.15, nugget = 0.08)),
  meuse_case("meuse-spherical-constant-trend", "spherical", list(range = 0.9, sill = 0.6, nugget = 0.05),
             matrix(1, length(ms$value)), matrix(1, length(ma$xKm))))

write_reference(list(
  source = list(
    tool = package_versions("gstat", "sp"),
    dataset = "tests/reference/colorado.json (package fields 14.1) and tests/reference/meuse.json (package sp 1.6.0)",
    command = "Rscript scripts/reference/gstat.R",
    date = "2026-12-01",
    licence = "computed values; data as in the two files",
    note = paste("siteSe: nugget as structure (gstat Nug); fieldSe: nugget as error (gstat Err); the mean is the same. Colorado trend: 1, sin(latitude),",
                 "elevation in km; meuse trend: 1, sqrtDist (1 alone where the name says so). rangeKm is ours:",
                 "gstat's Mat with kappa 1.5 was given rangeKm/sqrt(3). Se: square root of gstat's variance."),
    largestDifferenceFromDenseAlgebra = worst),
  colorado = colorado_cases,
  meuse = meuse_cases,
  coloradoBlock = list(lonDeg = square$lonDeg, latDeg = square$latDeg, elevationM = square$elevationM),
  blocks = colorado_blocks,
  blockWeights = square_weights,
  weightedBlocks = colorado_weighted_blocks), "gstat.json")
cat("largest difference from dense algebra:", worst, "\n")
