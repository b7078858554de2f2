# The meuse points of package sp: planar distances. Run: Rscript scripts/reference/meuse.R
suppressMessages(library(sp))
source("scripts/reference/to-json.R")
source("scripts/reference/dense.R")
data(meuse); data(meuse.grid)

set.seed(20261202)
drawn <- meuse.grid[sample(nrow(meuse.grid), 260), ]
gap <- apply(cross_distance(as.matrix(drawn[, c("x", "y")]), as.matrix(meuse[, c("x", "y")])), 1, min)
drawn <- drawn[gap > 1, ][1:240, ] # metres: no place on a station
stopifnot(nrow(drawn) == 240)

write_reference(list(
  source = list(
    tool = package_versions("sp"),
    dataset = "meuse and meuse.grid: topsoil zinc on the flood plain of the river Meuse (Rikken & Van Rijn 1993)",
    command = "Rscript scripts/reference/meuse.R",
    date = "2026-12-01",
    licence = "distributed in package sp (GPL >= 2)",
    note = "x, y in km (metres / 1000, Dutch national grid); value: log zinc; sqrtDist: trend column; seed 20261202"),
  stations = list(xKm = meuse$x / 1000, yKm = meuse$y / 1000, sqrtDist = sqrt(meuse$dist), value = log(meuse$zinc)),
  places = list(xKm = drawn$x / 1000, yKm = drawn$y / 1000, sqrtDist = sqrt(drawn$dist))), "meuse.json")
