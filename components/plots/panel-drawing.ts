import type uPlot from 'uplot';
import type { ThemeColours } from '../tokens';
import { gapsOf } from './series-plot';
import type { PlotSeries } from './series-plot';

/** Everything a panel's canvas is drawn from beside the line itself. */
export interface PanelScene {
  series: PlotSeries;
  nights: { fromMs: number; toMs: number }[];
  colour: ThemeColours;
  fromMs: number;
  toMs: number;
  ticksMs: number[];
  showTruth: boolean;
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
  for (const gap of gapsOf(scene.series, scene.fromMs, scene.toMs)) {
    const left = xOf(gap.fromMs);
    const right = xOf(gap.toMs);
    hatch(ctx, left, bbox.top, right - left, bbox.height, 6 * px, px, colour.hair);
    if (right - left > 64 * px) {
      ctx.font = `${12 * px}px "JetBrains Mono", monospace`;
      ctx.textAlign = 'center';
      const middle = (left + right) / 2;
      ctx.fillStyle = colour.panel;
      ctx.fillRect(middle - 32 * px, bbox.top + bbox.height - 24 * px, 64 * px, 18 * px);
      ctx.fillStyle = colour.inkSoft;
      ctx.fillText('no data', middle, bbox.top + bbox.height - 11 * px);
    }
  }
  ctx.restore();
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
  series.value.forEach((value, index) => {
    if (value === null) return;
    const grade = series.grade[index];
    const middle = ((series.startMs[index] ?? 0) + (series.endMs[index] ?? 0)) / 2;
    if (middle < scene.fromMs || middle > scene.toMs) return;
    const x = bbox.left + ((middle - scene.fromMs) / (scene.toMs - scene.fromMs)) * bbox.width;
    const y = Math.min(
      bbox.top + bbox.height - size,
      Math.max(bbox.top + size, plot.valToPos(value, 'y', true)),
    );
    if (grade === 1) drawTriangle(ctx, x, y, size, px, colour);
    else if (grade === 2) drawCross(ctx, x, y, size, px, colour);
    else if (isAlone(series, index)) {
      ctx.fillStyle =
        plot.series[1]?.stroke instanceof Function ? String(plot.series[1].stroke(plot, 1)) : colour.ink;
      ctx.beginPath();
      ctx.arc(x, y, 1.8 * px, 0, 2 * Math.PI);
      ctx.fill();
    }
  });
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
