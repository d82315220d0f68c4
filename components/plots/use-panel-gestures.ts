import { useLayoutEffect, useMemo, useRef, useState } from 'react';

export interface PanelGestures {
  window: { fromMs: number; toMs: number };
  bounds: { left: number; right: number };
  /** The pointer is over an instant; null when it left. */
  onHover: (atMs: number | null) => void;
  onChoose: (atMs: number) => void;
  /** Opens the period under an instant. */
  onOpen: (atMs: number) => void;
  onZoom: (fromMs: number, toMs: number) => void;
}

/** What the pointers on one panel are doing. */
interface Held {
  touches: Map<number, number>;
  mouseFrom: number | null;
  dragged: [number, number] | null;
  touchFrom: { x: number; isMoving: boolean } | null;
  /** The two instants that lie under the two fingers. */
  pinch: { instants: [number, number] } | null;
  /** The last click or tap. */
  pressed: { x: number; timeMs: number } | null;
}

/** Least length of a drag that means a span, not a click [px]. */
const dragPx = 6;
/** Longest time between the two presses of a double one [ms]. */
const doubleMs = 400;

/**
 * Pointer on a panel. Mouse: hover shows, click chooses, drag zooms into a span, double click opens. Touch: one finger moves the cursor
 * sideways while a vertical swipe goes on scrolling the page (touch-action: pan-y hands us only the rest), two fingers zoom time.
 */
export function usePanelGestures(gestures: PanelGestures) {
  const latest = useRef(gestures);
  useLayoutEffect(() => {
    latest.current = gestures;
  });
  const [span, setSpan] = useState<[number, number] | null>(null);
  const handlers = useMemo(() => {
    const held: Held = {
      touches: new Map(),
      mouseFrom: null,
      dragged: null,
      touchFrom: null,
      pinch: null,
      pressed: null,
    };
    const xOf = (event: React.PointerEvent<HTMLElement>) => {
      const { left, right } = latest.current.bounds;
      const x = event.clientX - event.currentTarget.getBoundingClientRect().left;
      return Math.min(right, Math.max(left, x));
    };
    const instantAt = (x: number) => {
      const { window, bounds } = latest.current;
      return (
        window.fromMs + ((x - bounds.left) / (bounds.right - bounds.left)) * (window.toMs - window.fromMs)
      );
    };
    /** A click or tap; the second one at the same place opens. (React Native Web hands no double click through.) */
    const press = (x: number, timeMs: number) => {
      const last = held.pressed;
      const isSecond = last !== null && timeMs - last.timeMs < doubleMs && Math.abs(x - last.x) <= dragPx;
      held.pressed = isSecond ? null : { x, timeMs };
      latest.current.onChoose(instantAt(x));
      if (isSecond) latest.current.onOpen(instantAt(x));
    };
    const stop = () => {
      held.mouseFrom = null;
      held.dragged = null;
      held.touchFrom = null;
      held.pinch = null;
      held.touches.clear();
      setSpan(null);
    };
    return {
      onPointerDown: (event: React.PointerEvent<HTMLElement>) => {
        const x = xOf(event);
        if (event.pointerType === 'mouse') {
          if (event.button !== 0) return;
          held.mouseFrom = x;
          event.currentTarget.setPointerCapture(event.pointerId);
          return;
        }
        held.touches.set(event.pointerId, x);
        if (held.touches.size === 2) {
          const [a = 0, b = 0] = [...held.touches.values()];
          held.touchFrom = null;
          held.pinch = { instants: [instantAt(a), instantAt(b)] };
        } else held.touchFrom = { x, isMoving: false };
      },
      onPointerMove: (event: React.PointerEvent<HTMLElement>) => {
        const x = xOf(event);
        if (event.pointerType === 'mouse') {
          if (held.mouseFrom !== null && Math.abs(x - held.mouseFrom) > dragPx) {
            held.dragged = [Math.min(x, held.mouseFrom), Math.max(x, held.mouseFrom)];
            setSpan(held.dragged);
          } else latest.current.onHover(instantAt(x));
          return;
        }
        if (!held.touches.has(event.pointerId)) return;
        held.touches.set(event.pointerId, x);
        if (held.pinch && held.touches.size === 2) {
          const [a = 0, b = 0] = [...held.touches.values()];
          const [atA, atB] = held.pinch.instants;
          // the two instants stay under the two fingers
          if (Math.abs(a - b) < 24) return;
          const perPx = (atB - atA) / (b - a);
          if (perPx <= 0) return;
          const { left, right } = latest.current.bounds;
          latest.current.onZoom(atA - (a - left) * perPx, atA + (right - a) * perPx);
          return;
        }
        if (held.touchFrom && (held.touchFrom.isMoving || Math.abs(x - held.touchFrom.x) > dragPx)) {
          held.touchFrom.isMoving = true;
          latest.current.onChoose(instantAt(x));
        }
      },
      onPointerUp: (event: React.PointerEvent<HTMLElement>) => {
        const x = xOf(event);
        if (event.pointerType === 'mouse') {
          if (held.dragged) latest.current.onZoom(instantAt(held.dragged[0]), instantAt(held.dragged[1]));
          else if (held.mouseFrom !== null) press(x, event.timeStamp);
          stop();
          return;
        }
        if (held.touchFrom && !held.pinch) {
          if (held.touchFrom.isMoving) latest.current.onChoose(instantAt(x));
          else press(x, event.timeStamp);
        }
        held.touches.delete(event.pointerId);
        if (held.touches.size === 0) stop();
      },
      // the browser took the finger for scrolling
      onPointerCancel: stop,
      onPointerLeave: (event: React.PointerEvent<HTMLElement>) => {
        if (event.pointerType === 'mouse' && held.mouseFrom === null) latest.current.onHover(null);
      },
    };
  }, []);
  return { span, handlers };
}
