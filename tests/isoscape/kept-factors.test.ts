import { expect, test } from 'vitest';
import { fitIsoscape, type Isoscape, keepsFactors } from '../../src/isoscape/index.js';
import { mayKeepFactors } from '../../src/isoscape/kept-factors.js';
import { inventedNetwork } from './invented-isoscape.js';

test('256 MB of factors of one field are kept', () => {
  expect(mayKeepFactors(9, 1930)).toBe(true); // 9 × 1930² × 8 bytes = 255.8 of 256 MiB
  expect(mayKeepFactors(9, 1931)).toBe(false);
  expect(mayKeepFactors(1, 5792)).toBe(true);
  expect(mayKeepFactors(1, 5793)).toBe(false);
});

test('factors of neighbourhoods are not kept, nor those of many nodes', () => {
  const held = { rangeKm: 500, sill: 0.3, nugget: 0.02 };
  const isoscape = fitIsoscape(inventedNetwork(3, 30), {
    family: 'exponential',
    terms: ['elevation'],
    fix: { along: held, across: held, turnDeg: 5 },
  });
  expect(keepsFactors(isoscape, {})).toBe(true);
  expect(keepsFactors(isoscape, { stations: 'all' })).toBe(true);
  expect(keepsFactors(isoscape, { stations: 'nearest' })).toBe(false);
  if (isoscape.isotopes !== 'both') throw new Error('a pair was fitted');
  const [node] = isoscape.across.nodes;
  const count = 40_000;
  const nodes = Array.from({ length: count }, () => ({ ...node!, weight: 1 / count }));
  const many: Isoscape = { ...isoscape, across: { ...isoscape.across, nodes } };
  expect(keepsFactors(many, {})).toBe(false);
  expect(keepsFactors(many, { plugIn: true })).toBe(true);
});
