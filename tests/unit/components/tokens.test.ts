import { describe, expect, it } from 'vitest';
import { darkPalette, lightPalette, rgbOf, traceDashes } from '../../../components/tokens/colours';
import type { Palette } from '../../../components/tokens/colours';

/*
 * Contrast: WCAG 2.2, "relative luminance" and "contrast ratio" definitions.
 * Colour vision: Machado, Oliveira & Fernandes 2009, "A physiologically-based model for simulation of
 * color vision deficiency", severity 1.0 matrices, applied in linear RGB (coefficients from memory; the
 * row sums of 1 are checked below, which keeps greys grey).
 * Distance: CIE76 in CIE L*a*b* (D65), about 2.3 being just noticeable (common practice).
 */

function linear(channel: number): number {
  const share = channel / 255;
  return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4;
}

function linearRgb(hex: string): number[] {
  return rgbOf(hex).map(linear);
}

function luminance(hex: string): number {
  const [red = 0, green = 0, blue = 0] = linearRgb(hex);
  return 0.2126 * red + 0.7152 * green + 0.0722 * blue;
}

function contrast(a: string, b: string): number {
  const [high = 0, low = 0] = [luminance(a), luminance(b)].sort((x, y) => y - x);
  return (high + 0.05) / (low + 0.05);
}

type Vision = 'usual' | 'protanopia' | 'deuteranopia' | 'tritanopia';

const seen: Record<Vision, readonly (readonly number[])[]> = {
  usual: [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
  ],
  protanopia: [
    [0.152286, 1.052583, -0.204868],
    [0.114503, 0.786281, 0.099216],
    [-0.003882, -0.048116, 1.051998],
  ],
  deuteranopia: [
    [0.367322, 0.860646, -0.227968],
    [0.280085, 0.672501, 0.047413],
    [-0.01182, 0.04294, 0.968881],
  ],
  tritanopia: [
    [1.255528, -0.076749, -0.178779],
    [-0.078411, 0.930809, 0.147602],
    [0.004733, 0.691367, 0.3039],
  ],
};

function labOf(hex: string, vision: Vision): number[] {
  const rgb = linearRgb(hex);
  const [red = 0, green = 0, blue = 0] = seen[vision].map((row) =>
    Math.min(
      1,
      Math.max(
        0,
        row.reduce((sum, weight, index) => sum + weight * (rgb[index] ?? 0), 0),
      ),
    ),
  );
  const x = (0.4124564 * red + 0.3575761 * green + 0.1804375 * blue) / 0.95047;
  const y = 0.2126729 * red + 0.7151522 * green + 0.072175 * blue;
  const z = (0.0193339 * red + 0.119192 * green + 0.9503041 * blue) / 1.08883;
  const f = (t: number): number => (t > 216 / 24389 ? Math.cbrt(t) : ((24389 / 27) * t + 16) / 116);
  return [116 * f(y) - 16, 500 * (f(x) - f(y)), 200 * (f(y) - f(z))];
}

function distance(a: string, b: string, vision: Vision): number {
  const other = labOf(b, vision);
  return Math.hypot(...labOf(a, vision).map((value, index) => value - (other[index] ?? 0)));
}

function pairs(colours: readonly string[]): [string, string][] {
  return colours.flatMap((a, index) => colours.slice(index + 1).map((b): [string, string] => [a, b]));
}

const palettes: [string, Palette][] = [
  ['light', lightPalette],
  ['dark', darkPalette],
];
const visions = Object.keys(seen) as Vision[];

describe('the measures themselves', () => {
  it('give black on white the contrast 21 and equal colours the contrast 1', () => {
    expect(contrast('#000000', '#FFFFFF')).toBeCloseTo(21, 6);
    expect(contrast('#777777', '#777777')).toBe(1);
  });

  it('give #767676 on white the contrast 4.54 (the known last grey that passes 4.5)', () => {
    expect(contrast('#767676', '#FFFFFF')).toBeCloseTo(4.54, 2);
  });

  it('put pure sRGB red at L* 53.24, a* 80.09, b* 67.20 (known D65 value)', () => {
    const [lightness, a, b] = labOf('#FF0000', 'usual');
    expect(lightness).toBeCloseTo(53.24, 1);
    expect(a).toBeCloseTo(80.09, 1);
    expect(b).toBeCloseTo(67.2, 1);
  });

  it('leave greys grey for every kind of sight', () => {
    for (const vision of visions) {
      for (const row of seen[vision]) expect(row.reduce((sum, weight) => sum + weight, 0)).toBeCloseTo(1, 4);
    }
  });
});

describe.each(palettes)('the %s palette', (_name, palette) => {
  const grounds = [palette.bench, palette.panel];

  it.each(['ink', 'inkSoft', 'beam', 'good', 'usable', 'rejected', 'missing'] as const)(
    'keeps %s at 4.6:1 or more on bench and panel',
    (token) => {
      for (const ground of grounds) expect(contrast(palette[token], ground)).toBeGreaterThanOrEqual(4.6);
    },
  );

  it('keeps rule and traces at 3.1:1 or more on bench and panel', () => {
    for (const colour of [palette.rule, ...palette.traces]) {
      for (const ground of grounds) expect(contrast(colour, ground), colour).toBeGreaterThanOrEqual(3.1);
    }
  });

  it.each(visions)('keeps good, usable and rejected apart (%s)', (vision) => {
    for (const [a, b] of pairs([palette.good, palette.usable, palette.rejected])) {
      expect(distance(a, b, vision), `${a} and ${b}`).toBeGreaterThanOrEqual(10);
    }
  });

  it.each(visions)('keeps the five traces apart (%s)', (vision) => {
    for (const [a, b] of pairs(palette.traces)) {
      expect(distance(a, b, vision), `${a} and ${b}`).toBeGreaterThanOrEqual(10);
    }
  });

  it('gives each trace a dash of its own', () => {
    expect(traceDashes).toHaveLength(palette.traces.length);
    expect(new Set(traceDashes.map((dash) => dash.join(' '))).size).toBe(traceDashes.length);
  });
});
