import type { Isoscape } from '../isoscape.js';
import { createExactSurface } from './exact-surface.js';
import { NearFarSurface } from './near-far-surface.js';
import type { Surface, SurfaceGrid, SurfaceOptions } from './surface.js';

/** Lays an isoscape over a grid: interpolating under the tolerance, or every cell exactly. */
export function createSurface(isoscape: Isoscape, grid: SurfaceGrid, options: SurfaceOptions): Surface {
  return options.exact
    ? createExactSurface(isoscape, options, 'all')
    : new NearFarSurface(isoscape, grid, options);
}
