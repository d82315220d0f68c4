import type { CSSProperties } from 'react';
import type { TextStyle, ViewStyle } from 'react-native';
import { darkPalette, lightPalette, withAlpha } from './colours';
import type { Palette } from './colours';

export type ThemeName = 'light' | 'dark';

export interface ThemeColours extends Palette {
  /** Thin line between rows and along axes. */
  hair: string;
  /** Faint fill of allowed spans and banners. */
  wash: string;
  /** Night behind a plot. */
  night: string;
  /** Behind a raised sheet. */
  veil: string;
}

export interface Theme {
  name: ThemeName;
  colour: ThemeColours;
}

const colourBesidePalette = {
  light: {
    ...lightPalette,
    hair: withAlpha(lightPalette.rule, 0.38),
    wash: withAlpha(lightPalette.ink, 0.05),
    night: withAlpha(lightPalette.ink, 0.055),
    veil: withAlpha(lightPalette.ink, 0.45),
  },
  dark: {
    ...darkPalette,
    hair: withAlpha(darkPalette.rule, 0.5),
    wash: withAlpha(darkPalette.ink, 0.06),
    night: withAlpha(darkPalette.bench, 0.55),
    veil: withAlpha('#000000', 0.55),
  },
} satisfies Record<ThemeName, ThemeColours>;

export const themes: Record<ThemeName, Theme> = {
  light: { name: 'light', colour: colourBesidePalette.light },
  dark: { name: 'dark', colour: colourBesidePalette.dark },
};

/** Steps of space in px. */
export const space = { xs: 4, s: 8, m: 12, l: 16, xl: 24, xxl: 32, xxxl: 48 } as const;

export const radius = 2;

export const face = {
  text: '"Atkinson Hyperlegible Next", "JetBrains Mono Greek", system-ui, sans-serif',
  label: 'Archivo, "JetBrains Mono Greek", system-ui, sans-serif',
  figure: '"JetBrains Mono", "JetBrains Mono Greek", ui-monospace, monospace',
} as const;

/** Fixed sizes of the frame in px. */
export const frame = { header: 52, index: 104, actionBar: 68, phoneTarget: 48, pointerTarget: 40 } as const;

/** From this width on [px] the wide layout is drawn. */
export const wideFromPx = 761;

export const motion = { controlMs: 120, sheetMs: 200, benchMs: 250 } as const;

/**
 * Style keys that only the web knows (outline, fontFeatureSettings, position: sticky, …), typed as a
 * React Native style. The one place where that cast happens.
 */
export function webStyle(style: CSSProperties): ViewStyle & TextStyle {
  return style as unknown as ViewStyle & TextStyle;
}

/** Figures: no ligatures, every digit the same width. */
export const figureFeatures = webStyle({
  fontVariantLigatures: 'none',
  fontFeatureSettings: '"liga" 0, "calt" 0, "tnum" 1',
});
