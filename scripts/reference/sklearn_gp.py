# Zero-mean Gaussian process predictions by scikit-learn at fixed kernels, with known error variances in `alpha`.
# Run: /usr/bin/python3 scripts/reference/sklearn_gp.py
import json
import platform
import warnings

import numpy
import sklearn
from sklearn.gaussian_process import GaussianProcessRegressor
from sklearn.gaussian_process.kernels import ConstantKernel, Matern

EARTH_RADIUS_KM = 6371.0088
PLACES = 80
SMOOTHNESS = {"exponential": 0.5, "matern32": 1.5, "matern52": 2.5}
CASES = [
    ("exponential", 120.0, 1.4, 0.35),
    ("matern32", 90.0, 1.2, 0.45),
    ("matern52", 70.0, 1.1, 0.5),
    ("matern32", 60.0, 2.0, 0.0),
]


def chord_positions_km(places):
    lon, lat = numpy.radians(places["lonDeg"]), numpy.radians(places["latDeg"])
    return EARTH_RADIUS_KM * numpy.column_stack(
        [numpy.cos(lat) * numpy.cos(lon), numpy.cos(lat) * numpy.sin(lon), numpy.sin(lat)]
    )


with open("tests/reference/colorado.json") as file:
    colorado = json.load(file)
stations = colorado["stations"]
x = chord_positions_km(stations)
x0 = chord_positions_km(colorado["places"])[:PLACES]
# A field of zero mean: what is left of the temperatures after a plain lapse rate, a fixed formula.
residual = numpy.array(stations["value"]) - (27.0 - 5.9 * numpy.array(stations["elevationM"]) / 1000.0)


def predict(family, range_km, sill, nugget):
    error = numpy.array(stations["errorVariance"]) + nugget
    kernel = ConstantKernel(sill, "fixed") * Matern(range_km, "fixed", nu=SMOOTHNESS[family])
    process = GaussianProcessRegressor(kernel, alpha=error, optimizer=None, normalize_y=False)
    mean, sd = process.fit(x, residual).predict(x0, return_std=True)
    return {
        "name": f"{family}-{range_km:g}km",
        "family": family,
        "rangeKm": range_km,
        "sill": sill,
        "nugget": nugget,
        "logLikelihood": process.log_marginal_likelihood_value_,
        "mean": mean.tolist(),
        "fieldSe": sd.tolist(),
    }


warnings.simplefilter("error")
result = {
    "source": {
        "tool": f"scikit-learn {sklearn.__version__}, numpy {numpy.__version__}, Python {platform.python_version()}",
        "dataset": "tests/reference/colorado.json (package fields 14.1)",
        "command": "/usr/bin/python3 scripts/reference/sklearn_gp.py",
        "date": "2026-12-01",
        "licence": "computed values; data as in that file",
        "note": "GaussianProcessRegressor, optimizer=None, ConstantKernel(sill) * Matern(rangeKm, nu), alpha = "
        "errorVariance + nugget, chordal x, y, z in km; values: station value - (27 - 5.9 elevation in km), mean 0 known; "
        "places: the first 80 of that file; fieldSe has no nugget in it; logLikelihood: the full one, mean 0",
    },
    "values": residual.tolist(),
    "placeCount": PLACES,
    "cases": [predict(*case) for case in CASES],
}
with open("tests/reference/sklearn.json", "w") as file:
    json.dump(result, file, indent=1, ensure_ascii=False)
    file.write("\n")
