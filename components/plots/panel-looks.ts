import type { ThemeColours } from '../tokens';
import { traceDashes } from '../tokens';

/** How a quantity is drawn; one trace colour and one dash each, all over the product. */
export interface PanelLook {
  trace: number;
  /** Dash index of the line; null draws points: an angle is never joined across north. */
  dash: number | null;
  /** Where the axis keeps room for the readout. */
  headroom: 'top' | 'bottom';
  /** Fixed splits and ends of the axis, for angles. */
  splits?: readonly number[];
}

const looks: Record<string, PanelLook> = {
  co2Flux: { trace: 0, dash: 0, headroom: 'bottom' },
  latentHeat: { trace: 1, dash: 1, headroom: 'top' },
  sensibleHeat: { trace: 2, dash: 2, headroom: 'top' },
  ustar: { trace: 3, dash: 3, headroom: 'top' },
  windSpeed: { trace: 4, dash: 4, headroom: 'top' },
  windDirection: { trace: 4, dash: null, headroom: 'top', splits: [0, 180, 360] },
  airTemperature: { trace: 4, dash: 0, headroom: 'top' },
};

export function panelLook(key: string): PanelLook {
  return looks[key] ?? { trace: 4, dash: 4, headroom: 'top' };
}

export function lookColour(look: PanelLook, colour: ThemeColours): string {
  return colour.traces[look.trace % colour.traces.length] ?? colour.ink;
}

export function lookDash(look: PanelLook): readonly number[] {
  return look.dash === null ? [] : (traceDashes[look.dash] ?? []);
}
