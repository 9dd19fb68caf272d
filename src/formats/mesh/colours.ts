/** Red, green and blue, 0 to 1, in proportion to light (linear, with the primaries of sRGB). */
export type LinearColour = readonly [number, number, number];

/**
 * Light of an OKLab colour; what no screen shows is clipped.
 *
 * Source: B. Ottosson (2020), "A perceptual color space for image processing"; matrices from memory.
 */
export function lightOfOklab(lightness: number, a: number, b: number): LinearColour {
  const l = lightness + 0.3963377774 * a + 0.2158037573 * b;
  const m = lightness - 0.1055613458 * a - 0.0638541728 * b;
  const s = lightness - 0.0894841775 * a - 1.291485548 * b;
  const l3 = l * l * l;
  const m3 = m * m * m;
  const s3 = s * s * s;
  return [
    clip(4.0767416621 * l3 - 3.3077115913 * m3 + 0.2309699292 * s3),
    clip(-1.2684380046 * l3 + 2.6097574011 * m3 - 0.3413193965 * s3),
    clip(-0.0041960863 * l3 - 0.7034186147 * m3 + 1.707614701 * s3),
  ];
}

/** Lightness, and the place between green and red and between blue and yellow, at the low end, the middle, the high end. */
const SCALE = [
  [0.33, -0.005, -0.105],
  [0.61, -0.008, -0.02],
  [0.89, -0.012, 0.13],
] as const;

/** Colour of a quantity: dark blue at 0, straw at 1, lightness in proportion, so that it reads in grey too. */
export function scaleColour(t: number): LinearColour {
  const x = !(t > 0) ? 0 : t > 1 ? 1 : t;
  const w0 = 2 * (x - 0.5) * (x - 1);
  const w1 = 4 * x * (1 - x);
  const w2 = 2 * x * (x - 0.5);
  const [low, middle, high] = SCALE;
  const mix = (k: 0 | 1 | 2) => w0 * low[k] + w1 * middle[k] + w2 * high[k];
  return lightOfOklab(mix(0), mix(1), mix(2));
}

/** Golden angle: hues that follow one another lie far apart, however many there are. */
const TURN = Math.PI * (3 - Math.sqrt(5));

/** Colour of a patch: a quiet red for the wall, which is number 0, and one hue a cap. */
export function patchColour(patch: number): LinearColour {
  if (patch === 0) return lightOfOklab(0.6, 0.11, 0.05);
  const hue = 3.6 + TURN * patch;
  return lightOfOklab(0.75, 0.13 * Math.cos(hue), 0.13 * Math.sin(hue));
}

function clip(x: number): number {
  return x < 0 ? 0 : x > 1 ? 1 : x;
}
