# scikit-learn's side of fit.bench.mjs: reads one JSON request a line, answers one a line.
import json
import sys
import time
import warnings

import numpy
import sklearn
from sklearn.gaussian_process import GaussianProcessRegressor
from sklearn.gaussian_process.kernels import ConstantKernel, Matern, WhiteKernel

warnings.simplefilter("ignore")
SMOOTHNESS = {"exponential": 0.5, "matern32": 1.5, "matern52": 2.5}


def libraries():
    try:
        from threadpoolctl import threadpool_info

        pools = [
            f"{pool['internal_api']} {pool['version']} kernel {pool.get('architecture', '?')}, {pool['num_threads']} threads"
            for pool in threadpool_info()
            if pool["user_api"] == "blas"
        ]
    except ImportError:
        pools = ["threadpoolctl is missing: BLAS kernel and threads unknown"]
    return f"scikit-learn {sklearn.__version__}, numpy {numpy.__version__}, {'; '.join(sorted(set(pools)))}"


def fit(request, x, z):
    start = request["start"]
    kernel = ConstantKernel(start["sill"], (1e-4, 1e4)) * Matern(
        start["rangeKm"], (1e-1, 1e5), nu=SMOOTHNESS[request["family"]]
    ) + WhiteKernel(start["nugget"], (1e-6, 1e3))
    process = GaussianProcessRegressor(kernel, alpha=0.0, n_restarts_optimizer=0, normalize_y=False)
    begin, cpu_begin = time.perf_counter(), time.process_time()
    process.fit(x, z[request["field"]])
    seconds, cpu_seconds = time.perf_counter() - begin, time.process_time() - cpu_begin
    fitted = process.kernel_
    return {
        "seconds": seconds,
        "cpuSeconds": cpu_seconds,
        "parameters": {
            "rangeKm": fitted.k1.k2.length_scale,
            "sill": fitted.k1.k1.constant_value,
            "nugget": fitted.k2.noise_level,
        },
    }


data = json.loads(sys.stdin.readline())
x = numpy.array(data["x"]).reshape(-1, 3)
z = numpy.array(data["z"])  # one row a field
print(json.dumps({"libraries": libraries()}), flush=True)
for line in sys.stdin:
    print(json.dumps(fit(json.loads(line), x, z)), flush=True)
