/** Red, green, blue, 0 to 1, as a screen takes them (sRGB). */
export type Colour = readonly [number, number, number];

/**
 * A scale from dark to light along a straight line of lightness in OKLab, with the hue moving between the blue and
 * the yellow side, the axis that red-blind and green-blind eyes keep. Order is carried by lightness alone, so the scale
 * also reads in grey.
 *
 * OKLab: B. Ottosson (2020), "A perceptual color space for image processing"; matrices from memory.
 */
export interface Palette {
  readonly id: string;
  readonly label: string;
  /** OKLab at the dark end, the middle and the light end; lightness is linear, the other two a parabola through three. */
  readonly stops: readonly [Colour, Colour, Colour];
}

export const PALETTES = [
  {
    id: 'night-straw',
    label: 'Night to straw',
    stops: [
      [0.33, -0.005, -0.105],
      [0.61, -0.008, -0.02],
      [0.89, -0.012, 0.13],
    ],
  },
  {
    id: 'plum-sand',
    label: 'Plum to sand',
    stops: [
      [0.32, 0.075, -0.075],
      [0.6, 0.085, 0.02],
      [0.88, 0.012, 0.08],
    ],
  },
  {
    id: 'grey',
    label: 'Grey',
    stops: [
      [0.3, 0, 0],
      [0.6, 0, 0],
      [0.9, 0, 0],
    ],
  },
] as const satisfies readonly Palette[];

/** The palette of an id; the first where there is none. */
export function paletteOf(id: string): Palette {
  return PALETTES.find((palette) => palette.id === id) ?? PALETTES[0];
}

function encodeSrgb(linear: number): number {
  const x = linear < 0 ? 0 : linear > 1 ? 1 : linear;
  return x <= 0.0031308 ? 12.92 * x : 1.055 * x ** (1 / 2.4) - 0.055;
}

/** sRGB of an OKLab colour; parts that no screen shows are clipped. */
export function colourOfOklab(lightness: number, a: number, b: number): Colour {
  const l = lightness + 0.3963377774 * a + 0.2158037573 * b;
  const m = lightness - 0.1055613458 * a - 0.0638541728 * b;
  const s = lightness - 0.0894841775 * a - 1.291485548 * b;
  const l3 = l * l * l;
  const m3 = m * m * m;
  const s3 = s * s * s;
  return [
    encodeSrgb(4.0767416621 * l3 - 3.3077115913 * m3 + 0.2309699292 * s3),
    encodeSrgb(-1.2684380046 * l3 + 2.6097574011 * m3 - 0.3413193965 * s3),
    encodeSrgb(-0.0041960863 * l3 - 0.7034186147 * m3 + 1.707614701 * s3),
  ];
}

/** Colour at t, 0 (dark, low) to 1 (light, high); t outside is clamped. */
export function colourAt(palette: Palette, t: number): Colour {
  const x = !(t > 0) ? 0 : t > 1 ? 1 : t;
  const [low, middle, high] = palette.stops;
  const w0 = 2 * (x - 0.5) * (x - 1);
  const w1 = 4 * x * (1 - x);
  const w2 = 2 * x * (x - 0.5);
  return colourOfOklab(
    low[0] + x * (high[0] - low[0]),
    w0 * low[1] + w1 * middle[1] + w2 * high[1],
    w0 * low[2] + w1 * middle[2] + w2 * high[2],
  );
}

/** (4 × count) bytes, RGBA, for a texture one row high. */
export function paletteBytes(palette: Palette, count: number): Uint8Array {
  const bytes = new Uint8Array(4 * count);
  for (let i = 0; i < count; i++) {
    const colour = colourAt(palette, i / (count - 1));
    for (let k = 0; k < 3; k++) bytes[4 * i + k] = Math.round(255 * colour[k]!);
    bytes[4 * i + 3] = 255;
  }
  return bytes;
}

/** A colour as CSS takes it. */
export function cssOf(colour: Colour): string {
  return `rgb(${colour.map((part) => Math.round(255 * part)).join(' ')})`;
}
