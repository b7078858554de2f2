/** sRGB components 0–255. */
export type Rgb = readonly [red: number, green: number, blue: number];
/** Lightness 0–1 and two opponent axes, in which equal distances look equal. */
export type Oklab = readonly [lightness: number, a: number, b: number];

/**
 * OKLab to sRGB (B. Ottosson 2020, "A perceptual color space for image processing"; sRGB curve: IEC 61966-2-1), rounded
 * to whole components. Throws a RangeError outside what sRGB can show.
 */
export function oklabToRgb([lightness, a, b]: Oklab): Rgb {
  const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
  const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
  const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
  const linear = [
    4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
    -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
    -0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s,
  ];
  const [red, green, blue] = linear.map((value) => {
    if (value < 0 || value > 1) throw new RangeError(`OKLab ${lightness}, ${a}, ${b} is beyond sRGB`);
    return Math.round(255 * (value <= 0.0031308 ? 12.92 * value : 1.055 * value ** (1 / 2.4) - 0.055));
  });
  return [red!, green!, blue!];
}
