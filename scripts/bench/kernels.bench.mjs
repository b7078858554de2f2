// The dense kernels, compiled against plain TypeScript: GFlop/s of one thread. The sizes are those of
// a network of 1,000 stations; every result is checked before it is timed.
import {
  borrowWorkspace,
  choleskyInPlace,
  covarianceBlock,
  createDenseWorkspace,
  multiplyInto,
  useKernels,
  withInverse,
} from '../../dist/kernels/index.js';
import { median, seededGaussian, seededUniform } from './measure.mjs';

export const title = 'kernels: dense algebra of one thread';

const SEED = 20261202;
const EXTENT_KM = 5000;
const RANGE_KM = 800;
const NUGGET = 0.1;
const REPETITIONS = 9;
const RESIDUAL = 1e-13;
const IMPLEMENTATIONS = ['reference', 'simd'];

export async function bench({ tiny }) {
  const n = tiny ? 70 : 1000;
  const repetitions = tiny ? 1 : REPETITIONS;
  const network = draw(n);
  const rows = [
    cholesky(network),
    inverse(network),
    ...[64, 256].map((columns) => solve(network, columns, 'solveLower', 'LX = C')),
    solve(network, 64, 'solveLowerTransposed', 'LᵀX = C'),
    product(network, 256),
    ...['exponential', 'matern32', 'matern52', 'spherical'].map((kind) => covariances(network, kind, 64)),
  ];
  const lines = [
    `${n} stations. Best of ${repetitions}, and the median in brackets.`,
    '',
    '| kernel | TypeScript | compiled | compiled / TypeScript |',
    '| --- | ---: | ---: | ---: |',
  ];
  for (const row of rows) lines.push(compare(row, repetitions));
  useKernels('simd');
  return [
    ...lines,
    '',
    `Seed ${SEED}. Rates are GFlop/s, for covariances millions a second. Residuals are at most ${RESIDUAL} (‖LLᵀ − K‖/‖K‖, ` +
      '‖Lx − c‖/(‖L‖‖x‖) and their like). Processor time, not the clock on the wall.',
  ];
}

/** Stations in a cube, an exponential covariance with a nugget, its factor, and right-hand sides. */
function draw(n) {
  const uniform = seededUniform(SEED);
  const gaussian = seededGaussian(uniform);
  const stationsKm = Float64Array.from({ length: 3 * n }, () => EXTENT_KM * uniform());
  const matrix = new Float64Array(n * n);
  useKernels('reference');
  covarianceBlock('exponential', 1, RANGE_KM, stationsKm, n, stationsKm, 0, n, matrix);
  for (let i = 0; i < n; i++) matrix[i * n + i] += NUGGET;
  const factor = Float64Array.from(matrix);
  choleskyInPlace(factor, n);
  const sides = Float64Array.from({ length: n * 256 }, gaussian);
  return { n, stationsKm, matrix, factor, sides };
}

function cholesky({ n, matrix }) {
  return {
    name: 'Cholesky factor',
    operations: n ** 3 / 3,
    prepare() {
      const workspace = createDenseWorkspace(n, 1);
      return {
        before: () => workspace.matrix.set(matrix),
        run: () => workspace.cholesky(),
        residual: () => factorResidual(workspace.matrix, matrix, n),
      };
    },
  };
}

function inverse({ n, matrix, factor }) {
  return {
    name: 'inverse from the factor, copied in',
    operations: (2 * n ** 3) / 3,
    prepare() {
      let first = new Float64Array(n);
      return {
        before() {},
        run: () =>
          withInverse(factor, n, (whole) => {
            first = whole.slice(0, n);
          }),
        // The first row of A⁻¹ times A is the first row of I.
        residual() {
          const row = multiplied(first, matrix, 1, n, n);
          row[0] -= 1;
          return norm(row) / (norm(matrix) * norm(first));
        },
      };
    },
  };
}

function solve({ n, factor, sides }, columns, how, name) {
  const c = sides.subarray(0, n * columns);
  return {
    name: `${name}, ${columns} columns`,
    operations: n * n * columns,
    prepare() {
      const workspace = borrowWorkspace(factor, n, columns);
      const own = createDenseWorkspace(n, columns);
      own.matrix.set(workspace.matrix);
      return {
        before: () => own.block.set(c),
        run: () => own[how](columns),
        residual() {
          const back = new Float64Array(n * columns);
          for (let i = 0; i < n; i++) {
            for (let k = 0; k <= i; k++) {
              const [to, from] = how === 'solveLower' ? [i, k] : [k, i];
              const l = factor[i * n + k];
              for (let j = 0; j < columns; j++) back[to * columns + j] += l * own.block[from * columns + j];
            }
          }
          return difference(back, c) / (norm(factor) * norm(own.block));
        },
      };
    },
  };
}

function product({ n, matrix, sides }, columns) {
  const b = sides.subarray(0, n * columns);
  return {
    name: `product, ${n} × ${n} by ${columns} columns`,
    operations: 2 * n * n * columns,
    prepare() {
      const out = new Float64Array(n * columns);
      return {
        before() {},
        run: () => multiplyInto(matrix, n, n, b, columns, out),
        residual: () => difference(out, multiplied(matrix, b, n, n, columns)) / (norm(matrix) * norm(b)),
      };
    },
  };
}

function covariances({ n, stationsKm }, kind, count) {
  return {
    name: `covariances, ${kind}, ${count} places`,
    operations: n * count,
    scale: 1e6,
    // The processor's clock is too coarse for one.
    runs: 50,
    prepare(others) {
      const workspace = createDenseWorkspace(n, count);
      const out = workspace.block;
      return {
        before() {},
        run: () => covarianceBlock(kind, 1, RANGE_KM, stationsKm, n, stationsKm, 0, count, out),
        residual: () =>
          others.first === undefined ? keep(others, out) : difference(out, others.first) / norm(out),
      };
    },
  };
}

/** The first implementation's covariances stand for those of the second to be compared with. */
function keep(others, out) {
  others.first = Float64Array.from(out);
  return 0;
}

function compare({ name, operations, scale = 1e9, runs = 1, prepare }, repetitions) {
  const others = {};
  const rates = IMPLEMENTATIONS.map((implementation) => {
    useKernels(implementation);
    const { before, run, residual } = prepare(others);
    before();
    run();
    const error = residual();
    if (!(error <= RESIDUAL)) throw new Error(`${name} (${implementation}): residual ${error}`);
    const seconds = Array.from({ length: repetitions }, () => {
      before();
      const begin = process.cpuUsage();
      for (let k = 0; k < runs; k++) run();
      return process.cpuUsage(begin).user / 1e6 / runs;
    });
    return { best: operations / Math.min(...seconds) / scale, usual: operations / median(seconds) / scale };
  });
  const show = ({ best, usual }) => `${best.toFixed(1)} (${usual.toFixed(1)})`;
  return `| ${name} | ${rates.map(show).join(' | ')} | ${(rates[1].best / rates[0].best).toFixed(1)} |`;
}

function factorResidual(l, a, n) {
  let error = 0;
  let size = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = 0; k <= j; k++) sum += l[i * n + k] * l[j * n + k];
      error += (sum - a[i * n + j]) ** 2;
      size += a[i * n + j] ** 2;
    }
  }
  return Math.sqrt(error / size);
}

function multiplied(a, b, rows, inner, columns) {
  const out = new Float64Array(rows * columns);
  for (let i = 0; i < rows; i++) {
    for (let k = 0; k < inner; k++) {
      const x = a[i * inner + k];
      for (let j = 0; j < columns; j++) out[i * columns + j] += x * b[k * columns + j];
    }
  }
  return out;
}

function norm(x) {
  return Math.sqrt(x.reduce((sum, value) => sum + value * value, 0));
}

function difference(x, y) {
  return norm(x.map((value, i) => value - y[i]));
}
