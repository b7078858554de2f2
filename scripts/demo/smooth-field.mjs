/**
 * A smooth random field whose correlation length changes from west to east, so that no stationary covariance fits
 * it: Gaussian bumps about random centres with heavy-tailed heights. About unit variance everywhere.
 *
 * @param random seeded stream
 * @param area { halfWidthKm, halfHeightKm } of the rectangle the centres fill
 * @param widthKm { west, east } standard width of a bump at the two ends
 * @returns (xKm, yKm) => number
 */
export function createSmoothField(random, area, widthKm, bumpCount) {
  const areaKm2 = 4 * area.halfWidthKm * area.halfHeightKm;
  const bumps = Array.from({ length: bumpCount }, () => {
    const xKm = random.between(-area.halfWidthKm, area.halfWidthKm);
    const yKm = random.between(-area.halfHeightKm, area.halfHeightKm);
    const share = (xKm + area.halfWidthKm) / (2 * area.halfWidthKm);
    const width = widthKm.west + (widthKm.east - widthKm.west) * share;
    // The squares of bumps scattered with density ρ integrate to ρπw² (shot noise), hence this height.
    const height = random.heavyTailed() * Math.sqrt(areaKm2 / (bumpCount * Math.PI * width * width));
    return { xKm, yKm, height, inverse: 1 / (2 * width * width) };
  });
  return (xKm, yKm) => {
    let sum = 0;
    for (const bump of bumps) {
      const squared = (xKm - bump.xKm) ** 2 + (yKm - bump.yKm) ** 2;
      sum += bump.height * Math.exp(-squared * bump.inverse);
    }
    return sum;
  };
}
