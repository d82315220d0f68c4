import { useEffect } from 'react';

export interface WindowKeys {
  step: (by: number) => void;
  move: (share: number) => void;
  zoom: (factor: number) => void;
  reset: () => void;
  open: () => void;
  help: () => void;
}

/**
 * Keys of the series page: ← → period (Shift: ten), [ ] previous and next period, + − closer and wider, 0 everything, Enter opens the
 * period, ? shows the sheet. Keys pressed inside a field are left alone, and so is what a control has used itself: arrows on the focused
 * spine move the window.
 */
export function useWindowKeys(keys: WindowKeys): void {
  useEffect(() => {
    const onKey = (event: KeyboardEvent) => {
      if (event.ctrlKey || event.metaKey || event.altKey || event.defaultPrevented) return;
      const target = event.target as HTMLElement | null;
      if (target?.closest('input, textarea, select, dialog')) return;
      const onControl = target?.closest('a, button, [role="button"]') != null;
      const by = event.shiftKey ? 10 : 1;
      switch (event.key) {
        case 'ArrowLeft':
          keys.step(-by);
          break;
        case 'ArrowRight':
          keys.step(by);
          break;
        case '[':
          keys.step(-1);
          break;
        case ']':
          keys.step(1);
          break;
        case '+':
        case '=':
          keys.zoom(0.5);
          break;
        case '-':
          keys.zoom(2);
          break;
        case '0':
          keys.reset();
          break;
        case '?':
          keys.help();
          break;
        case 'Enter':
          if (onControl) return;
          keys.open();
          break;
        default:
          return;
      }
      event.preventDefault();
    };
    globalThis.addEventListener('keydown', onKey);
    return () => globalThis.removeEventListener('keydown', onKey);
  }, [keys]);
}

/** What the sheet behind `?` lists. */
export const windowKeyWords: readonly [string, string][] = [
  ['← →', 'previous and next period; with Shift ten at once'],
  ['[ ]', 'previous and next period'],
  ['+ −', 'closer and wider'],
  ['0', 'everything'],
  ['Enter', 'open the period under the cursor'],
  ['?', 'this sheet'],
  ['click', 'the cursor stays at this period when the pointer leaves'],
  ['double click', 'open the period'],
  ['drag', 'zoom into a span; drag the spine to move in time'],
  ['one finger', 'move the cursor; up and down scrolls the page'],
  ['two fingers', 'closer and wider'],
];
