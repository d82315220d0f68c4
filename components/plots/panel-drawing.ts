import type uPlot from 'uplot';
import { face } from '../tokens';
import type { ThemeColours } from '../tokens';
import { gapsOf, visibleRange } from './series-plot';
import type { PlotSeries } from './series-plot';

/** Everything a panel's canvas is drawn from beside the line itself. */
export interface PanelScene {
  series: PlotSeries;
  nights: readonly { fromMs: number; toMs: number }[];
  colour: ThemeColours;
  fromMs: number;
  toMs: number;
  /** Instants of the vertical lines: midnights, or months in a long window. */
  ticksMs: readonly number[];
  showTruth: boolean;
  /** The run is still at work: what has no period yet is on its way, not missing. */
  isPending: boolean;
  /** Colour of the line, for values that stand alone. */
  lineColour: string;
}

/** Canvas pixels per CSS pixel. */
function ratio(plot: uPlot): number {
  return plot.ctx.canvas.width / plot.width;
}

/** Night wash, vertical lines, zero line and hatched gaps, under the line. */
export function drawBehind(plot: uPlot, scene: PanelScene): void {
  const { ctx, bbox } = plot;
  const { colour } = scene;
  const px = ratio(plot);
  const xOf = (ms: number) => bbox.left + ((ms - scene.fromMs) / (scene.toMs - scene.fromMs)) * bbox.width;
  ctx.save();
  ctx.beginPath();
  ctx.rect(bbox.left, bbox.top, bbox.width, bbox.height);
  ctx.clip();
  ctx.fillStyle = colour.night;
  for (const night of scene.nights) {
    ctx.fillRect(xOf(night.fromMs), bbox.top, xOf(night.toMs) - xOf(night.fromMs), bbox.height);
  }
  ctx.lineWidth = px;
  ctx.strokeStyle = colour.hair;
  for (const tick of scene.ticksMs) {
    const x = Math.round(xOf(tick)) + 0.5;
    ctx.beginPath();
    ctx.moveTo(x, bbox.top);
    ctx.lineTo(x, bbox.top + bbox.height);
    ctx.stroke();
  }
  const zero = plot.valToPos(0, 'y', true);
  if (zero > bbox.top && zero < bbox.top + bbox.height) {
    ctx.strokeStyle = colour.rule;
    ctx.beginPath();
    ctx.moveTo(bbox.left, Math.round(zero) + 0.5);
    ctx.lineTo(bbox.left + bbox.width, Math.round(zero) + 0.5);
    ctx.stroke();
  }
  const { series, fromMs, toMs } = scene;
  for (const gap of gapsOf(series, fromMs, toMs, scene.isPending ? 'without-value' : 'all')) {
    const left = xOf(gap.fromMs);
    const right = xOf(gap.toMs);
    hatch(ctx, left, bbox.top, right - left, bbox.height, 6 * px, px, colour.hair);
    if (right - left > 72 * px)
      gapWords(ctx, 'no data', (left + right) / 2, bbox.top + bbox.height - 15 * px, px, colour);
  }
  if (scene.isPending) {
    const zeroOrMiddle = Math.min(bbox.top + bbox.height - px, Math.max(bbox.top + px, zero));
    for (const gap of gapsOf(series, fromMs, toMs, 'absent')) {
      ctx.strokeStyle = colour.rule;
      ctx.lineWidth = 2 * px;
      ctx.setLineDash([2 * px, 4 * px]);
      ctx.beginPath();
      ctx.moveTo(xOf(gap.fromMs), zeroOrMiddle);
      ctx.lineTo(xOf(gap.toMs), zeroOrMiddle);
      ctx.stroke();
      ctx.setLineDash([]);
      const width = xOf(gap.toMs) - xOf(gap.fromMs);
      if (width > 90 * px) gapWords(ctx, 'computing', xOf(gap.fromMs) + width / 2, zeroOrMiddle, px, colour);
    }
  }
  ctx.restore();
}

function gapWords(
  ctx: CanvasRenderingContext2D,
  words: string,
  centre: number,
  middle: number,
  px: number,
  colour: ThemeColours,
): void {
  ctx.font = `${12 * px}px ${face.figure}`;
  ctx.textAlign = 'center';
  ctx.textBaseline = 'middle';
  const half = (words.length * 7.2 * px) / 2 + 6 * px;
  ctx.fillStyle = colour.panel;
  ctx.fillRect(centre - half, middle - 9 * px, 2 * half, 18 * px);
  ctx.fillStyle = colour.inkSoft;
  ctx.fillText(words, centre, middle);
}

function hatch(
  ctx: CanvasRenderingContext2D,
  left: number,
  top: number,
  width: number,
  height: number,
  step: number,
  lineWidth: number,
  stroke: string,
): void {
  ctx.save();
  ctx.beginPath();
  ctx.rect(left, top, width, height);
  ctx.clip();
  ctx.strokeStyle = stroke;
  ctx.lineWidth = lineWidth;
  ctx.beginPath();
  for (let x = left - height; x < left + width; x += step) {
    ctx.moveTo(x, top + height);
    ctx.lineTo(x + height, top);
  }
  ctx.stroke();
  ctx.restore();
}

/** Grade shapes over the line; good is the plain line. What lies beyond the axis sits on its edge. */
export function drawMarks(plot: uPlot, scene: PanelScene): void {
  const { ctx, bbox } = plot;
  const { series, colour } = scene;
  const px = ratio(plot);
  ctx.save();
  const spacing = bbox.width / Math.max(1, (scene.toMs - scene.fromMs) / 1_800_000);
  const size = (spacing < 6 * px ? 3 : spacing < 10 * px ? 4 : 5) * px;
  // In a long window many marks fall on one spot: each spot gets the worst of them once.
  const cell = 3 * px;
  const drawn = new Map<number, number>();
  const [first, end] = visibleRange(series, scene.fromMs, scene.toMs);
  for (let index = first; index < end; index += 1) {
    const value = series.value[index] ?? null;
    if (value === null) continue;
    const grade = series.grade[index] ?? null;
    const isLone = grade !== 1 && grade !== 2 && isAlone(series, index);
    if (grade !== 1 && grade !== 2 && !isLone) continue;
    const middle = ((series.startMs[index] ?? 0) + (series.endMs[index] ?? 0)) / 2;
    if (middle < scene.fromMs || middle > scene.toMs) continue;
    const x = bbox.left + ((middle - scene.fromMs) / (scene.toMs - scene.fromMs)) * bbox.width;
    const y = Math.min(
      bbox.top + bbox.height - size,
      Math.max(bbox.top + size, plot.valToPos(value, 'y', true)),
    );
    const spot = Math.round(x / cell) * 65_536 + Math.round(y / cell);
    const rank = isLone ? 0 : (grade ?? 0);
    if ((drawn.get(spot) ?? -1) >= rank) continue;
    drawn.set(spot, rank);
    if (grade === 1) drawTriangle(ctx, x, y, size, px, colour);
    else if (grade === 2) drawCross(ctx, x, y, size, px, colour);
    else {
      ctx.fillStyle = scene.lineColour;
      ctx.beginPath();
      ctx.arc(x, y, 1.8 * px, 0, 2 * Math.PI);
      ctx.fill();
    }
  }
  ctx.restore();
}

/** A good value without a neighbour to be joined to would not show as a line. */
function isAlone(series: PlotSeries, index: number): boolean {
  return (series.line[index - 1] ?? null) === null && (series.line[index + 1] ?? null) === null;
}

function drawTriangle(
  ctx: CanvasRenderingContext2D,
  x: number,
  y: number,
  size: number,
  px: number,
  colour: ThemeColours,
): void {
  ctx.beginPath();
  ctx.moveTo(x, y - size);
  ctx.lineTo(x + size, y + size * 0.85);
  ctx.lineTo(x - size, y + size * 0.85);
  ctx.closePath();
  ctx.fillStyle = colour.panel;
  ctx.fill();
  ctx.strokeStyle = colour.usable;
  ctx.lineWidth = 1.4 * px;
  ctx.stroke();
  ctx.beginPath();
  ctx.moveTo(x, y - size);
  ctx.lineTo(x, y + size * 0.85);
  ctx.lineTo(x - size, y + size * 0.85);
  ctx.closePath();
  ctx.fillStyle = colour.usable;
  ctx.fill();
}

function drawCross(
  ctx: CanvasRenderingContext2D,
  x: number,
  y: number,
  size: number,
  px: number,
  colour: ThemeColours,
): void {
  const reach = size * 0.85;
  ctx.strokeStyle = colour.rejected;
  ctx.lineWidth = 2 * px;
  ctx.lineCap = 'round';
  ctx.beginPath();
  ctx.moveTo(x - reach, y - reach);
  ctx.lineTo(x + reach, y + reach);
  ctx.moveTo(x + reach, y - reach);
  ctx.lineTo(x - reach, y + reach);
  ctx.stroke();
}
