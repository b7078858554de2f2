# Spring temperatures of the Colorado network in package fields, the maxima with known sampling variances, and
# 240 places of its 4 km elevation grid to predict at. Run: Rscript scripts/reference/colorado.R
suppressMessages(library(fields))
source("scripts/reference/to-json.R")
source("scripts/reference/dense.R")
data(COmonthlyMet)

years <- CO.years >= 1960 & CO.years < 1990
spring <- CO.tmax.MAM[years, ]
count <- colSums(!is.na(spring))
used <- which(count >= 15)
spring <- spring[, used]
n <- count[used]
within <- apply(spring, 2, var, na.rm = TRUE)
minimum <- CO.tmin.MAM[years, used]
stopifnot(colSums(!is.na(minimum)) >= 14)
pooled <- sum((n - 1) * within) / sum(n - 1)

set.seed(20261201)
cells <- expand.grid(i = seq_along(CO.elevGrid$x), j = seq_along(CO.elevGrid$y))
cells <- cells[sample(nrow(cells), 240), ]
places <- list(lonDeg = CO.elevGrid$x[cells$i], latDeg = CO.elevGrid$y[cells$j],
               elevationM = CO.elevGrid$z[cbind(cells$i, cells$j)])
gap <- min(cross_distance(chord_positions_km(places$lonDeg, places$latDeg),
                          chord_positions_km(CO.loc$lon[used], CO.loc$lat[used])))
stopifnot(gap > 0.1, !anyNA(places$elevationM)) # km: no place on a station

write_reference(list(
  source = list(
    tool = package_versions("fields"),
    dataset = "COmonthlyMet: monthly surface meteorology for Colorado 1895-1997, a subset of the US cooperative stations",
    command = "Rscript scripts/reference/colorado.R",
    date = "2026-12-01",
    licence = "observations of the US government (public domain), distributed in package fields (GPL >= 2)",
    note = paste("value: mean over the years 1960-1989 of the March-May mean of daily maximum temperature, degrees C,",
                 "stations with at least 15 such years; minimum: the same of daily minimum temperature; errorVariance (of value): pooled between-year variance / years;",
                 "places: seeded draw from CO.elevGrid (seed 20261201)")),
  pooledVariance = pooled,
  stations = list(id = CO.id[used], lonDeg = CO.loc$lon[used], latDeg = CO.loc$lat[used], elevationM = CO.elev[used],
                  value = as.vector(colMeans(spring, na.rm = TRUE)),
                  minimum = as.vector(colMeans(minimum, na.rm = TRUE)), years = as.vector(n),
                  errorVariance = as.vector(pooled / n)),
  places = places), "colorado.json")
