import { describe, expect, it } from 'vitest';
import {
  type Colour,
  colourAt,
  colourOfOklab,
  cssOf,
  PALETTES,
  paletteBytes,
  paletteOf,
} from '../../../viewer/colours.ts';

const linear = (x: number) => (x <= 0.04045 ? x / 12.92 : ((x + 0.055) / 1.055) ** 2.4);

/** CIE 1976 L*a*b* under D65. Source: CIE 15 formulas and the sRGB matrix of IEC 61966-2-1; from memory. */
function lab(colour: Colour): [number, number, number] {
  const [r, g, b] = colour.map(linear) as [number, number, number];
  const f = (t: number) => (t > 216 / 24389 ? Math.cbrt(t) : ((24389 / 27) * t + 16) / 116);
  const x = f((0.4124564 * r + 0.3575761 * g + 0.1804375 * b) / 0.95047);
  const y = f(0.2126729 * r + 0.7151522 * g + 0.072175 * b);
  const z = f((0.0193339 * r + 0.119192 * g + 0.9503041 * b) / 1.08883);
  return [116 * y - 16, 500 * (x - y), 200 * (y - z)];
}

/**
 * What people without one kind of cone see. Source: Machado, Oliveira, Fernandes (2009), IEEE TVCG 15:1291, severity
 * 1.0; from memory.
 */
const BLIND = {
  red: [0.152286, 1.052583, -0.204868, 0.114503, 0.786281, 0.099216, -0.003882, -0.048116, 1.051998],
  green: [0.367322, 0.860646, -0.227968, 0.280085, 0.672501, 0.047413, -0.01182, 0.04294, 0.968881],
  blue: [1.255528, -0.076749, -0.178779, -0.078411, 0.930809, 0.147602, 0.004733, 0.691367, 0.3039],
};

function seen(colour: Colour, m: readonly number[]): Colour {
  const c = colour.map(linear);
  const back = (x: number) => {
    const y = Math.min(1, Math.max(0, x));
    return y <= 0.0031308 ? 12.92 * y : 1.055 * y ** (1 / 2.4) - 0.055;
  };
  return [0, 3, 6].map((i) => back(m[i]! * c[0]! + m[i + 1]! * c[1]! + m[i + 2]! * c[2]!)) as unknown as Colour;
}

const STEPS = 32;
const difference = (a: readonly number[], b: readonly number[]) =>
  Math.hypot(a[0]! - b[0]!, a[1]! - b[1]!, a[2]! - b[2]!);

describe.each(PALETTES)('palette $id', (palette) => {
  const colours = Array.from({ length: STEPS + 1 }, (_, i) => colourAt(palette, i / STEPS));

  it('rises in lightness, evenly, from dark to light', () => {
    const lightness = colours.map((colour) => lab(colour)[0]);
    const mean = (lightness.at(-1)! - lightness[0]!) / STEPS;
    expect(lightness.at(-1)! - lightness[0]!).toBeGreaterThan(60);
    for (let i = 0; i < STEPS; i++) {
      const step = lightness[i + 1]! - lightness[i]!;
      expect(step).toBeGreaterThan(0.75 * mean);
      expect(step).toBeLessThan(1.25 * mean);
    }
  });

  it.each(Object.entries(BLIND))('keeps its order and its steps for %s-blind eyes', (_, matrix) => {
    const labs = colours.map((colour) => lab(seen(colour, matrix)));
    for (let i = 0; i < STEPS; i++) {
      expect(labs[i + 1]![0]).toBeGreaterThan(labs[i]![0]);
      // Common practice, no source: two differences of about 1 are told apart side by side.
      expect(difference(labs[i + 1]!, labs[i]!)).toBeGreaterThan(1);
    }
  });

  it('stays within what a screen shows', () => {
    for (const colour of colours) for (const part of colour) expect(part).toBeGreaterThanOrEqual(0);
    // The widest clip would show as a plateau at 0 or 1.
    for (const colour of colours) for (const part of colour) expect(part).toBeLessThan(1);
  });
});

describe('colours', () => {
  it('knows white, grey and black in OKLab', () => {
    for (const part of colourOfOklab(1, 0, 0)) expect(part).toBeCloseTo(1, 3);
    for (const part of colourOfOklab(0, 0, 0)) expect(part).toBe(0);
    const grey = colourOfOklab(0.6, 0, 0);
    expect(grey[0]).toBeCloseTo(grey[1], 3);
    // Grey of lightness L has linear light L³.
    expect(linear(grey[1])).toBeCloseTo(0.6 * 0.6 * 0.6, 3);
  });

  it('clamps past the ends', () => {
    const palette = paletteOf('grey');
    expect(colourAt(palette, -1)).toEqual(colourAt(palette, 0));
    expect(colourAt(palette, 7)).toEqual(colourAt(palette, 1));
    expect(colourAt(palette, Number.NaN)).toEqual(colourAt(palette, 0));
  });

  it('gives bytes that match, and the first palette for an unknown id', () => {
    const palette = paletteOf('no such');
    expect(palette).toBe(PALETTES[0]);
    const bytes = paletteBytes(palette, 256);
    expect(bytes.length).toBe(4 * 256);
    expect([...bytes.slice(4 * 255, 4 * 255 + 3)]).toEqual(colourAt(palette, 1).map((part) => Math.round(255 * part)));
    expect(cssOf([1, 0, 0.5])).toBe('rgb(255 0 128)');
  });
});
