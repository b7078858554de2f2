# numpy and scipy's side of the benchmarks: exact universal kriging in blocks of places. Arguments: folder, family,
# stations, trend columns, places, variables. Reads raw doubles (row-major) from the folder. A request line
# {"places": K, "block": B, "factor": bool} answers the seconds; `factor` puts the factorisation inside the clock.
import json
import sys
import time

import numpy
import scipy
from scipy.linalg import cho_solve, cholesky, solve_triangular
from scipy.spatial.distance import cdist

folder, family = sys.argv[1:3]
n, p, m, variables = (int(text) for text in sys.argv[3:7])


def doubles(name, rows, columns):
    return numpy.fromfile(f"{folder}/{name}.f64").reshape(rows, columns)


def covariance(a, b, range_km, sill):
    """Written into as few arrays as may be: a second pass over memory costs as much as the arithmetic."""
    t = cdist(a, b)
    t *= 1 / range_km
    if family == "exponential":
        numpy.negative(t, out=t)
        numpy.exp(t, out=t)
    elif family == "matern32":
        t *= numpy.sqrt(3)
        e = numpy.exp(-t)
        t += 1
        t *= e
    else:
        t = numpy.where(t < 1, 1 - 1.5 * t + 0.5 * t * t * t, 0.0)
    t *= sill
    return t


def system(v):
    range_km, sill, nugget = parameters[v]
    k = covariance(stations, stations, range_km, sill)
    k[numpy.diag_indices(n)] += nugget + errors
    lower = cholesky(k, lower=True, overwrite_a=True, check_finite=False)
    whitened = solve_triangular(lower, trend, lower=True, check_finite=False)
    trend_lower = cholesky(whitened.T @ whitened, lower=True)
    z = solve_triangular(lower, values[:, v], lower=True, check_finite=False)
    beta = cho_solve((trend_lower, True), whitened.T @ z)
    weights = solve_triangular(lower, z - whitened @ beta, lower=True, trans=1, check_finite=False)
    return lower, whitened, trend_lower, beta, weights


def predict(v, ready, count, block, mean, variance):
    range_km, sill, _ = parameters[v]
    lower, whitened, trend_lower, beta, weights = ready
    for first in range(0, count, block):
        last = min(first + block, count)
        # The transpose of a row-major block is column-major: LAPACK solves it in place.
        c = covariance(places[first:last], stations, range_km, sill).T
        mean[first:last] = rows[first:last] @ beta + weights @ c
        x = solve_triangular(lower, c, lower=True, overwrite_b=True, check_finite=False)
        r = rows[first:last].T - whitened.T @ x
        r = solve_triangular(trend_lower, r, lower=True, check_finite=False)
        variance[first:last] = (
            sill - numpy.einsum("ij,ij->j", x, x) + numpy.einsum("ij,ij->j", r, r)
        )


def blas():
    try:
        from threadpoolctl import threadpool_info

        found = [
            f"{pool['internal_api']} {pool['version']} kernel {pool.get('architecture', '?')}, "
            f"{pool['num_threads']} thread{'s' if pool['num_threads'] > 1 else ''}"
            for pool in threadpool_info()
            if pool["user_api"] == "blas"
        ]
        return "; ".join(sorted(set(found)))
    except ImportError:
        return "BLAS kernel unknown (threadpoolctl is missing)"


stations, trend = doubles("stations", n, 3), doubles("trend", n, p)
values, parameters = doubles("values", n, variables), doubles("parameters", variables, 3)
errors = doubles("errors", n, 1)[:, 0]
places, rows = doubles("places", m, 3), doubles("rows", m, p)
kept = [system(v) for v in range(variables)]
print(json.dumps({"libraries": f"numpy {numpy.__version__}, scipy {scipy.__version__}, {blas()}"}), flush=True)
for line in sys.stdin:
    request = json.loads(line)
    out = numpy.empty((2 * variables, request["places"]))
    begin = time.perf_counter()
    for v in range(variables):
        ready = system(v) if request["factor"] else kept[v]
        predict(v, ready, request["places"], request["block"], out[2 * v], out[2 * v + 1])
    seconds = time.perf_counter() - begin
    out.tofile(f"{folder}/numpy.f64")
    print(json.dumps({"seconds": seconds}), flush=True)
