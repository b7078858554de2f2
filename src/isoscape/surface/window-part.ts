import type { SurfaceWindow } from './surface.js';

/** Calls `copy` with where each row of a part of a window begins in the window and in the part. */
export function forEachRow(
  part: SurfaceWindow,
  window: SurfaceWindow,
  copy: (inWindow: number, inPart: number) => void,
): void {
  const first = (part.firstRow - window.firstRow) * window.width + part.firstColumn - window.firstColumn;
  for (let row = 0; row < part.height; row++) copy(first + row * window.width, row * part.width);
}

export function anyWanted(part: SurfaceWindow, window: SurfaceWindow, wanted: Uint8Array): boolean {
  let found = false;
  forEachRow(part, window, (start) => {
    found ||= wanted.subarray(start, start + part.width).includes(1);
  });
  return found;
}

/** The wanted cells of a window that lie in a part of it. */
export function wantedIn(part: SurfaceWindow, window: SurfaceWindow, wanted: Uint8Array): Uint8Array {
  const out = new Uint8Array(wanted.length);
  forEachRow(part, window, (start) => out.set(wanted.subarray(start, start + part.width), start));
  return out;
}
