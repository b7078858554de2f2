import { describe, expect, test } from 'vitest';
import { chebyshevNodes, interpolateLattice, lagrangeRows } from '../../../src/isoscape/surface/chebyshev.js';

describe('Chebyshev interpolation', () => {
  test.each([1, 2, 5, 9, 12])('%i nodes reproduce polynomials of one degree less, at nodes too', (order) => {
    const nodes = chebyshevNodes(order);
    const targets = Float64Array.of(0, 0.1, nodes[0]!, 0.5, nodes[order - 1]!, 0.93, 1);
    const rows = lagrangeRows(order, targets);
    for (let degree = 0; degree < order; degree++) {
      targets.forEach((target, c) => {
        const sum = nodes.reduce((total, x, i) => total + x ** degree * rows[i * targets.length + c]!, 0);
        expect(sum).toBeCloseTo(target ** degree, 12);
      });
    }
  });

  test('an analytic function converges at the rate its nearest singularity sets (Trefethen 2013, theorem 8.2)', () => {
    // 1/(1.5 − x) on [0, 1]: on [−1, 1] its pole stands at 2, so errors fall as (2 + √3)^−order.
    const targets = Float64Array.from({ length: 101 }, (_, k) => k / 100);
    const worst = (order: number) => {
      const rows = lagrangeRows(order, targets);
      const nodes = chebyshevNodes(order);
      return Math.max(
        ...Array.from(targets, (target, c) => {
          const sum = nodes.reduce((total, x, i) => total + rows[i * targets.length + c]! / (1.5 - x), 0);
          return Math.abs(sum - 1 / (1.5 - target));
        }),
      );
    };
    const rate = (worst(4) / worst(10)) ** (1 / 6);
    expect(rate).toBeGreaterThan(0.9 * (2 + Math.sqrt(3)));
    expect(rate).toBeLessThan(1.1 * (2 + Math.sqrt(3)));
  });

  test.each([5, 6])('a lattice is interpolated along both axes, function by function (order %i)', (order) => {
    const nodes = chebyshevNodes(order);
    const functions = [
      (x: number, y: number) => x ** 3 * y - 2 * y ** 2,
      (x: number, y: number) => 1 + x * y ** 4,
    ];
    const values = new Float64Array(2 * order * order);
    for (const [f, of] of functions.entries()) {
      nodes.forEach((y, j) => {
        nodes.forEach((x, i) => {
          values[(f * order + j) * order + i] = of(x, y);
        });
      });
    }
    const across = Float64Array.of(0, 0.2, 0.9);
    const down = Float64Array.of(0.4, 1);
    const out = new Float64Array(2 * 6);
    const line = new Float64Array(order * 3);
    interpolateLattice(
      values,
      2,
      order,
      lagrangeRows(order, across),
      3,
      lagrangeRows(order, down),
      2,
      line,
      out,
    );
    for (const [f, of] of functions.entries()) {
      down.forEach((y, j) => {
        across.forEach((x, i) => {
          expect(out[(f * 2 + j) * 3 + i]).toBeCloseTo(of(x, y), 12);
        });
      });
    }
  });
});
