/** The palette. Colour belongs to measurement and quality; everything else is ink on paper. */

export interface Palette {
  bench: string;
  panel: string;
  ink: string;
  inkSoft: string;
  /** Borders only, never text. */
  rule: string;
  /** Focus and cursor. */
  beam: string;
  good: string;
  usable: string;
  rejected: string;
  missing: string;
  /** One colour per plotted quantity; always together with the dash of the same index. */
  traces: readonly [string, string, string, string, string];
}

export const lightPalette: Palette = {
  bench: '#F5F3EC',
  panel: '#FFFFFF',
  ink: '#1B2A2F',
  inkSoft: '#4C5B5F',
  rule: '#7C8A8C',
  beam: '#6B2F7A',
  good: '#104986',
  usable: '#945F04',
  rejected: '#801F2B',
  missing: '#666F74',
  traces: ['#5489A6', '#BE7831', '#5741AE', '#804414', '#5C0B25'],
};

export const darkPalette: Palette = {
  bench: '#10191C',
  panel: '#18252A',
  ink: '#E9EFEC',
  inkSoft: '#A9B8B8',
  rule: '#6C7D80',
  beam: '#D9B3F0',
  good: '#74CEFC',
  usable: '#F5B94A',
  rejected: '#FE4B4C',
  missing: '#8A9296',
  traces: ['#64ACFB', '#DDCD52', '#E6749E', '#8FE8EE', '#A76610'],
};

/** Dash pattern per trace index, in CSS pixels: solid, long, dots, dash-dot, short. */
export const traceDashes: readonly (readonly number[])[] = [[], [9, 4], [2, 3], [10, 3, 2, 3], [4, 3]];

export function rgbOf(hex: string): [number, number, number] {
  const value = Number.parseInt(hex.slice(1), 16);
  return [(value >> 16) & 255, (value >> 8) & 255, value & 255];
}

/** The same colour, translucent; usable in styles, in SVG and on a canvas. */
export function withAlpha(hex: string, alpha: number): string {
  const [red, green, blue] = rgbOf(hex);
  return `rgba(${red}, ${green}, ${blue}, ${alpha})`;
}
