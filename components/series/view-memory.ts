/** Where each run's series page was left, so that coming back from a period finds the same window and period. Lasts as long as the page load. */

export interface RememberedView {
  window: { fromMs: number; toMs: number };
  chosenMs: number | null;
}

const views = new Map<string, RememberedView>();

export function rememberView(runId: string, view: RememberedView): void {
  views.set(runId, view);
}

/** Marks another period as the one looked at last. */
export function rememberPeriod(runId: string, startMs: number): void {
  const view = views.get(runId);
  if (view) views.set(runId, { ...view, chosenMs: startMs });
}

export function rememberedView(runId: string): RememberedView | null {
  return views.get(runId) ?? null;
}
