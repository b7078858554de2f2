# gstat's side of the benchmarks: universal kriging of several variables, each with its own covariance parameters.
# Arguments: folder, family, stations, trend columns, places, variables. Reads raw doubles (row-major) from the folder;
# a request line {"places":K} kriges the first K places and answers the seconds; means and variances are left beside.
suppressMessages({library(sp); library(gstat)})
arguments <- commandArgs(trailingOnly = TRUE)
folder <- arguments[1]
family <- arguments[2]
counts <- as.integer(arguments[3:6])
n <- counts[1]; p <- counts[2]; m <- counts[3]; variables <- counts[4]

doubles <- function(name, rows, columns)
  matrix(readBin(file.path(folder, paste0(name, ".f64")), "double", rows * columns), rows, columns, byrow = TRUE)
FAMILY <- c(exponential = "Exp", spherical = "Sph", matern32 = "Mat")
model_of <- function(range, sill, nugget)
  vgm(sill, FAMILY[[family]], if (family == "matern32") range / sqrt(3) else range, kappa = 1.5,
      add.to = vgm(nugget, "Err", 0))

trend <- as.data.frame(doubles("trend", n, p))
names(trend) <- paste0("f", seq_len(p))
rows <- as.data.frame(doubles("rows", m, p))
names(rows) <- names(trend)
stations <- SpatialPointsDataFrame(SpatialPoints(doubles("stations", n, 3)), trend)
values <- doubles("values", n, variables)
parameters <- doubles("parameters", variables, 3)
places <- SpatialPointsDataFrame(SpatialPoints(doubles("places", m, 3)), rows)
formula <- as.formula(paste("value ~ 0 +", paste(names(trend), collapse = " + ")))

cat(sprintf('{"libraries":"gstat %s, %s"}\n', packageVersion("gstat"), R.version.string))
input <- file("stdin", "r")
while (length(line <- readLines(input, 1)) > 0) {
  count <- as.integer(gsub("[^0-9]", "", line))
  out <- matrix(0, 2 * variables, count)
  begin <- proc.time()[["elapsed"]]
  for (v in seq_len(variables)) {
    stations$value <- values[, v]
    model <- model_of(parameters[v, 1], parameters[v, 2], parameters[v, 3])
    got <- krige(formula, stations, places[seq_len(count), ], model, debug.level = 0)
    out[2 * v - 1, ] <- got$var1.pred
    out[2 * v, ] <- got$var1.var
  }
  seconds <- proc.time()[["elapsed"]] - begin
  writeBin(as.vector(t(out)), file.path(folder, "gstat.f64"))
  cat(sprintf('{"seconds":%.6f}\n', seconds))
}
