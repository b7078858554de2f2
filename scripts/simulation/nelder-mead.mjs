/**
 * Largest value of a function without derivatives: Nelder & Mead 1965, Comput. J. 7:308–313, restarted at its own
 * result until a restart gains less than `tolerance`.
 *
 * @param {(x: number[]) => number} value −Infinity where it is not defined
 * @param {readonly number[]} start
 * @param {readonly number[]} steps of the first simplex
 * @returns {{ x: number[], value: number, evaluations: number }}
 */
export function maximise(value, start, steps, { tolerance = 1e-5, maxEvaluations = 4000 } = {}) {
  const counted = { evaluations: 0 };
  const negative = (x) => {
    counted.evaluations += 1;
    return -value(x);
  };
  let best = { x: [...start], value: negative(start) };
  for (let restart = 0; restart < 8; restart++) {
    const found = descend(negative, best.x, steps, tolerance, counted, maxEvaluations);
    const gain = best.value - found.value;
    if (gain > 0) best = found;
    if (gain < tolerance || counted.evaluations >= maxEvaluations) break;
  }
  return { x: best.x, value: -best.value, evaluations: counted.evaluations };
}

function descend(f, start, steps, tolerance, counted, maxEvaluations) {
  const width = start.length;
  const vertex = (x) => ({ x, value: f(x) });
  let simplex = [vertex([...start])];
  for (let k = 0; k < width; k++) simplex.push(vertex(start.map((v, i) => (i === k ? v + steps[k] : v))));
  for (;;) {
    simplex = simplex.sort((a, b) => a.value - b.value);
    const worst = simplex[width];
    if (worst.value - simplex[0].value < tolerance / 10 || counted.evaluations >= maxEvaluations)
      return simplex[0];
    const centre = start.map((_, i) => simplex.slice(0, width).reduce((sum, v) => sum + v.x[i], 0) / width);
    const along = (factor) => vertex(centre.map((c, i) => c + factor * (worst.x[i] - c)));
    const reflected = along(-1);
    if (reflected.value < simplex[0].value) {
      const expanded = along(-2);
      simplex[width] = expanded.value < reflected.value ? expanded : reflected;
    } else if (reflected.value < simplex[width - 1].value) {
      simplex[width] = reflected;
    } else {
      const contracted = along(reflected.value < worst.value ? -0.5 : 0.5);
      if (contracted.value < Math.min(reflected.value, worst.value)) simplex[width] = contracted;
      else {
        const [best] = simplex;
        simplex = simplex.map((v, k) => (k === 0 ? v : vertex(best.x.map((b, i) => (b + v.x[i]) / 2))));
      }
    }
  }
}
