import { formatNumber } from '../format/numbers';

/** What a limit bar draws: a value, its limits, the ends of its ruler. */
export interface RulerInput {
  /** NaN or null draws the ruler without a mark. */
  value: number | null;
  decimals?: number;
  /** Good up to here. */
  softHigh?: number | null;
  /** Rejected above. */
  hardHigh?: number | null;
  /** Good down to here. */
  softLow?: number | null;
  /** Rejected below. */
  hardLow?: number | null;
  /** A limit of the parent recipe, dashed. */
  parentLimit?: number | null;
  /** An informative limit ("usual up to 15"): changes no grade. */
  usual?: boolean;
  /** Ends of the ruler; chosen from limits and value when left out. */
  from?: number;
  to?: number;
}

export function isNumber(value: number | null | undefined): value is number {
  return value !== null && value !== undefined && Number.isFinite(value);
}

const niceSteps = [1, 2, 2.5, 5, 10];

/** Ticks at a round step, at most ten over the ruler. */
export function rulerTicks(from: number, to: number): number[] {
  const span = to - from;
  if (!(span > 0)) return [];
  const rough = span / 8;
  const magnitude = 10 ** Math.floor(Math.log10(rough));
  const step = (niceSteps.find((nice) => nice * magnitude >= rough) ?? 10) * magnitude;
  const ticks: number[] = [];
  for (let index = Math.ceil(from / step - 1e-9); index * step <= to + step * 1e-9; index += 1)
    ticks.push(index * step || 0);
  return ticks;
}

/** Ends of a ruler on which limits and value all have room. */
export function rulerSpan(props: RulerInput): { from: number; to: number } {
  const { softHigh, hardHigh, softLow, hardLow, parentLimit, value } = props;
  const limits = [softHigh, hardHigh, softLow, hardLow, parentLimit].filter(isNumber);
  const high = Math.max(0, ...limits);
  const low = Math.min(0, ...limits);
  const reach = Math.max(high - low, 1e-9);
  const isHighSided = isNumber(softHigh) || isNumber(hardHigh);
  const isLowSided = isNumber(softLow) || isNumber(hardLow);
  let to =
    high + reach * (isHighSided && !isLowSided && !isNumber(hardHigh) && !isNumber(parentLimit) ? 1 : 0.25);
  let from = isLowSided && isHighSided ? low - reach * 0.25 : low < 0 ? low - reach * 0.25 : 0;
  if (isNumber(value)) {
    // a value far outside is drawn at the end of the ruler, not at the price of the limits' legibility
    to = Math.max(to, Math.min(value + reach * 0.1, high + reach * 2));
    from = Math.min(from, Math.max(value - reach * 0.1, low - reach * 2));
  }
  return { from: props.from ?? from, to: props.to ?? to };
}

/** Where each limit stands and how it is written. */
export function limitWords(props: RulerInput): { at: number; text: string }[] {
  const { softHigh, hardHigh, softLow, hardLow, usual } = props;
  const decimals = props.decimals ?? 0;
  const figure = (value: number): string => trimFigure(value, decimals);
  if (isNumber(softLow) && isNumber(softHigh)) {
    return [{ at: (softLow + softHigh) / 2, text: `${figure(softLow)} to ${figure(softHigh)}` }];
  }
  const words: { at: number; text: string }[] = [];
  if (isNumber(softHigh)) {
    const text = usual ? 'usual up to' : isNumber(hardHigh) ? 'good up to' : 'limit';
    words.push({ at: softHigh, text: `${text} ${figure(softHigh)}` });
  }
  if (isNumber(hardHigh)) {
    words.push({
      at: hardHigh,
      text: `${isNumber(softHigh) ? 'rejected above' : 'limit'} ${figure(hardHigh)}`,
    });
  }
  if (isNumber(softLow)) {
    const text = usual ? 'usually at least' : isNumber(hardLow) ? 'good from' : 'at least';
    words.push({ at: softLow, text: `${text} ${figure(softLow)}` });
  }
  if (isNumber(hardLow)) {
    words.push({
      at: hardLow,
      text: `${isNumber(softLow) ? 'rejected below' : 'at least'} ${figure(hardLow)}`,
    });
  }
  return words;
}

/** Limits are round numbers: written with as many decimals as they need, at most those of the value + 1. */
export function trimFigure(value: number, decimals: number): string {
  for (let digits = 0; digits <= decimals + 1; digits += 1) {
    if (Math.abs(Number(value.toFixed(digits)) - value) < 1e-9) return formatNumber(value, digits);
  }
  return formatNumber(value, decimals + 1);
}
