import { QUANTITIES, summarise } from './compare.mjs';

const SHOWN = { d18O: 'δ18O', d2H: 'δ2H', dexcess: 'd-excess' };

/** Rows of numbers: how well the sites' truth was met, one a quantity; RMSE in ‰. */
export function comparisonRows(tallies, baselines) {
  return QUANTITIES.map((quantity) => {
    const scores = summarise(tallies[quantity]);
    const rmseOf = (name) => Math.sqrt(baselines[quantity][name] / scores.count);
    const rmse = { mean: rmseOf('mean'), regression: rmseOf('regression'), nearest: rmseOf('nearest') };
    return { quantity, ...scores, baselineRmse: rmse };
  });
}

/** The same as a Markdown table, which reads well on a terminal too. */
export function comparisonTable(rows, level) {
  const lines = rows.map(
    ({ quantity, count, coverage, rmse, bias, meanSquaredZ, meanWidth, baselineRmse }) => {
      const { mean, regression, nearest } = baselineRmse;
      const numbers = [rmse, mean, regression, nearest, bias, meanSquaredZ, meanWidth / 2].map((v) =>
        v.toFixed(2),
      );
      return [SHOWN[quantity].padEnd(8), `${(100 * coverage).toFixed(1)} % of ${count}`, ...numbers];
    },
  );
  const header = [
    '        ',
    `within ${100 * level} % interval`,
    'RMSE ‰',
    'of mean',
    'of regression',
    'of nearest',
    'bias ‰',
    'mean z²',
    'half width ‰',
  ];
  const widths = header.map((title, k) => Math.max(title.length, ...lines.map((line) => line[k].length)));
  const row = (cells) =>
    `| ${cells.map((cell, k) => (k === 0 ? cell.padEnd(widths[k]) : cell.padStart(widths[k]))).join(' | ')} |`;
  const rule = `| ${widths.map((w, k) => (k === 0 ? '-'.repeat(w) : `${'-'.repeat(w - 1)}:`)).join(' | ')} |`;
  return [row(header), rule, ...lines.map(row)].join('\n');
}
