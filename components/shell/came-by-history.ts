/** Long enough for a page's chunk to arrive, short enough not to catch the next click [ms]. */
const historyStepMs = 800;

let lastHistoryStep = Number.NEGATIVE_INFINITY;

if (typeof window !== 'undefined') {
  window.addEventListener('popstate', () => {
    lastHistoryStep = performance.now();
  });
}

/** Whether the reader came here by back or forward, where the browser restores the place on the page. */
export function cameByHistory(): boolean {
  return performance.now() - lastHistoryStep < historyStepMs;
}
