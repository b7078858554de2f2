export { createSurface } from './create-surface.js';
export type { Locate, Surface, SurfaceGrid, SurfaceOptions, SurfaceWindow } from './surface.js';
export { HYDROGEN_TOLERANCE_FACTOR } from './tolerance.js';
