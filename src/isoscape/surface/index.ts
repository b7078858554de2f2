export { createExactSurface } from './exact-surface.js';
export {
  createSurface,
  type Locate,
  type Surface,
  type SurfaceGrid,
  type SurfaceOptions,
  type SurfaceWindow,
} from './surface.js';
