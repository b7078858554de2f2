/**
 * Where the registry's shifts of datum cannot be used as they stand. Each definition was held against PROJ 9.1 at the
 * middle of its area of use: projections agree to millimetres, 97 % of the codes to 60 m with their shift of datum. The
 * rest carry a rotation with its sign turned or in microradians instead of seconds, or a shift made for another area.
 */

/** Shifts put right, as seven parameters of the position vector method (EPSG operations 15934 and 15929). */
const CORRECTED: ReadonlyMap<string, string> = new Map([
  // Netherlands: rotations stood in microradians
  [
    '565.4171,50.3319,465.5524,1.9342,-1.6677,9.1019,4.0725',
    '565.4171,50.3319,465.5524,-0.398957,0.343988,-1.87740,4.0725',
  ],
  // Belgium: rotations stood with the other method's sign
  [
    '-106.8686,52.2978,-103.7239,-0.3366,0.457,-1.8422,-1.2747',
    '-106.8686,52.2978,-103.7239,0.3366,-0.457,1.8422,-1.2747',
  ],
]);

/** Shifts that PROJ puts more than 60 m, up to 7 km, elsewhere. */
const WRONG: ReadonlySet<string> = new Set([
  '-0.293,766.95,87.713,-0.195704,-1.695068,-3.473016,-0.039338',
  '-102.283,-10.277,-257.396,-3.976,-0.002,-6.203,12.315',
  '-106,-129,165,0,0,0,0',
  '-125,53,467,0,0,0,0',
  '-127.535,113.495,-12.7,1.603747,-0.153612,-5.364408,5.33745',
  '-134,229,-29,0,0,0,0',
  '-136,-108,-292,0,0,0,0',
  '-151.99,287.04,-147.45,0,0,0,0',
  '-153.33,-169.41,86.39,0,0,0,0',
  '-179.483,-69.379,-27.584,7.862,-8.163,-6.042,-13.925',
  '-210.502,-66.902,-48.476,-2.094,15.067,5.817,0.485',
  '-239.749,88.181,30.488,-0.263,-0.082,-1.211,2.229',
  '-241.54,-163.64,396.06,0,0,0,0',
  '-265.8867,76.9851,20.2667,0.33746,3.09264,-2.53861,0.4598',
  '-270.933,115.599,-360.226,-5.266,-1.238,2.381,-5.109',
  '-275.7224,94.7824,340.8944,-8.001,-4.42,-11.821,1',
  '-288.885,-91.744,126.244,1.691,-0.41,0.211,-4.598',
  '-292.295,248.758,429.447,-4.9971,-2.99,-6.6906,1.0289',
  '-33.722,153.789,94.959,8.581,4.478,-4.54,8.95',
  '-355,21,72,0,0,0,0',
  '-44.183,-0.58,-38.489,-2.3867,-2.7072,3.5196,-8.2703',
  '-50.9,-347.6,-231,0,0,0,0',
  '-93.799,-132.737,-219.073,1.844,-0.648,6.37,-0.169',
  '-96.062,-82.428,-121.753,-4.801,-0.345,1.376,1.496',
  '0,0,0,-8.393,0.749,-10.276,0',
  '124.5,-63.5,-281,0,0,0,0',
  '15.8,-154.4,-82.3,0,0,0,0',
  '198,881,317,0,0,0,0',
  '2.329,-147.042,-92.08,0.309,-0.325,-0.497,5.69',
  '214,804,268,0,0,0,0',
  '217,823,299,0,0,0,0',
  '226.702,-193.337,-35.371,2.229,4.391,-9.238,0.9798',
  '23.772,17.49,17.859,0.3132,1.85274,-1.67299,-5.4262',
  '230,-199,-752,0,0,0,0',
  '31,146,47,0,0,0,0',
  '414.1,41.3,603.1,0.855,-2.141,7.023,0',
  '485.021,169.465,483.839,-7.786342,-4.397554,-4.102655,0',
  '584.9636,107.7175,413.8067,-1.1155,-0.2824,3.1384,7.9922',
  '595.48,121.69,515.35,-4.115,2.9383,-0.853,-3.408',
  '631.392,-66.551,481.442,-1.09,4.445,4.487,-4.43',
  '8.853,-52.644,180.304,0.393,2.323,-2.96,-24.081',
  '982.6087,552.753,-540.873,32.39344,-153.25684,-96.2266,16.805',
]);

/** CRS said to lie as WGS 84 does, which PROJ puts 80 to 170 m off. */
const WRONG_CODES: ReadonlySet<number> = new Set([3167, 3168, 4751, 6990, 6991]);

/** The definition with its shift of datum put right; null where its shift is known to be wrong. */
export function withUsableShift(epsg: number, definition: string): string | null {
  if (WRONG_CODES.has(epsg)) return null;
  const shift = /\+towgs84=(\S+)/.exec(definition)?.[1];
  if (shift === undefined) return definition;
  if (WRONG.has(shift)) return null;
  const corrected = CORRECTED.get(shift);
  return corrected === undefined ? definition : definition.replace(shift, corrected);
}
