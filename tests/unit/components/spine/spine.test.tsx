import { cleanup, fireEvent, render, screen } from '@testing-library/react';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { gridInstants, zoomedWindow } from '../../../../components/spine/spine-geometry';
import { describeSpine, Spine } from '../../../../components/spine/Spine';
import { windowWords } from '../../../../components/spine/window-words';
import type { SpineData } from '../../../../server/contract/api';

vi.mock('expo-router', () => ({ router: { push: vi.fn() } }));

const hour = 3_600_000;
const day = 24 * hour;

const data: SpineData = {
  fromMs: 0,
  toMs: 10 * day,
  binMs: day,
  recorded: Array.from({ length: 10 }, () => 1),
  gradedFlux: 'co2Flux',
  good: Array.from({ length: 10 }, () => 0.5),
  usable: Array.from({ length: 10 }, () => 0.25),
  rejected: Array.from({ length: 10 }, () => 0.25),
  setUpChangesMs: [],
  runId: null,
};

afterEach(cleanup);

function spine(window: { fromMs: number; toMs: number }) {
  const onWindow = vi.fn();
  render(<Spine data={data} width={600} offsetMinutes={0} window={window} onWindow={onWindow} />);
  return { slider: screen.getByRole('slider', { name: 'Time window' }), onWindow };
}

describe('the spine under the keyboard', () => {
  it('moves its window by a tenth, with Shift by its whole length', () => {
    const { slider, onWindow } = spine({ fromMs: 4 * day, toMs: 5 * day });
    fireEvent.keyDown(slider, { key: 'ArrowRight' });
    fireEvent.keyDown(slider, { key: 'ArrowLeft', shiftKey: true });
    expect(onWindow.mock.calls).toEqual([
      [{ fromMs: 98.4 * hour, toMs: 122.4 * hour }],
      [{ fromMs: 3 * day, toMs: 4 * day }],
    ]);
  });

  it('goes to either end and no farther', () => {
    const { slider, onWindow } = spine({ fromMs: 9 * day, toMs: 10 * day });
    fireEvent.keyDown(slider, { key: 'End' });
    fireEvent.keyDown(slider, { key: 'PageDown' });
    fireEvent.keyDown(slider, { key: 'Home' });
    expect(onWindow.mock.calls).toEqual([
      [{ fromMs: 9 * day, toMs: 10 * day }],
      [{ fromMs: 9 * day, toMs: 10 * day }],
      [{ fromMs: 0, toMs: day }],
    ]);
  });

  it('keeps the keys it used and passes on the others', () => {
    const { slider, onWindow } = spine({ fromMs: 4 * day, toMs: 5 * day });
    expect(fireEvent.keyDown(slider, { key: 'ArrowRight' })).toBe(false);
    expect(fireEvent.keyDown(slider, { key: '+' })).toBe(true);
    expect(onWindow).toHaveBeenCalledOnce();
  });

  it('says the window, what was recorded, and which flux it grades', () => {
    const { slider } = spine({ fromMs: 4 * day, toMs: 5 * day });
    expect(slider.getAttribute('aria-valuetext')).toContain('5 January 1970');
    expect(describeSpine(data, 0)).toBe(
      '1–10 January 1970: 100 % recorded; FC good 50 %, usable 25 %, rejected 25 %',
    );
  });
});

describe('the words of a window', () => {
  it('name days for whole days and both clock times for less', () => {
    expect(windowWords(0, 4 * day, 0)).toBe('1–4 January 1970');
    expect(windowWords(6 * hour, 12 * hour + 29_000, 0)).toBe('1 January 1970, 06:00–12:00');
    expect(windowWords(-hour, 5 * hour, 60)).toBe('1 January 1970, 00:00–06:00');
  });
});

describe('a zoomed window', () => {
  const bounds = { fromMs: 0, toMs: 100 * hour };

  it('keeps the instant it is zoomed about in its place', () => {
    expect(zoomedWindow({ fromMs: 20 * hour, toMs: 60 * hour }, 0.5, 30 * hour, bounds, hour)).toEqual({
      fromMs: 25 * hour,
      toMs: 45 * hour,
    });
  });

  it('is never shorter than the least length nor longer than the run', () => {
    const shortest = zoomedWindow({ fromMs: 0, toMs: hour }, 0.5, 0, bounds, hour);
    expect(shortest.toMs - shortest.fromMs).toBe(hour);
    expect(zoomedWindow({ fromMs: 10 * hour, toMs: 90 * hour }, 2, 50 * hour, bounds, hour)).toEqual(bounds);
  });
});

describe('vertical lines of the panels', () => {
  it('stand at midnights under hours, and at every labelled day in a longer window', () => {
    const short = gridInstants({ fromMs: 6 * hour, toMs: 2 * day + 6 * hour, width: 800 }, 0);
    expect(short).toEqual([day, 2 * day]);
    const long = gridInstants({ fromMs: 0, toMs: 12 * day, width: 800 }, 0);
    expect(long).toEqual(Array.from({ length: 13 }, (_, index) => index * day));
  });
});
