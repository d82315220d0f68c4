import { cleanup, fireEvent, render, screen } from '@testing-library/react';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { useWindowKeys } from '../../../../components/series/use-window-keys';

const keys = { step: vi.fn(), move: vi.fn(), zoom: vi.fn(), reset: vi.fn(), open: vi.fn(), help: vi.fn() };

function Page() {
  useWindowKeys(keys);
  return (
    <>
      <input aria-label="name" />
      <button>a button</button>
      <div
        role="slider"
        aria-label="spine"
        aria-valuenow={0}
        tabIndex={0}
        onKeyDown={(event) => event.key.startsWith('Arrow') && event.preventDefault()}
      />
    </>
  );
}

beforeEach(() => {
  render(<Page />);
});
afterEach(() => {
  cleanup();
  vi.clearAllMocks();
});

const press = (key: string, target: Element = document.body, more = {}) =>
  fireEvent.keyDown(target, { key, ...more });

describe('keys of the series page', () => {
  it('step by one period, with Shift by ten', () => {
    press('ArrowRight');
    press('ArrowLeft', document.body, { shiftKey: true });
    press(']');
    press('[');
    expect(keys.step.mock.calls).toEqual([[1], [-10], [1], [-1]]);
  });

  it('zoom, show everything, show the sheet, open the period', () => {
    press('+');
    press('-');
    press('0');
    press('?');
    press('Enter');
    expect(keys.zoom.mock.calls).toEqual([[0.5], [2]]);
    expect(keys.reset).toHaveBeenCalledOnce();
    expect(keys.help).toHaveBeenCalledOnce();
    expect(keys.open).toHaveBeenCalledOnce();
  });

  it('leave a field alone while somebody types in it', () => {
    press('0', screen.getByLabelText('name'));
    press('ArrowLeft', screen.getByLabelText('name'));
    expect(keys.reset).not.toHaveBeenCalled();
    expect(keys.step).not.toHaveBeenCalled();
  });

  it('leave Enter to the button that has the focus, and the browser its shortcuts', () => {
    press('Enter', screen.getByRole('button'));
    press('0', document.body, { ctrlKey: true });
    expect(keys.open).not.toHaveBeenCalled();
    expect(keys.reset).not.toHaveBeenCalled();
  });

  it('leave the arrows to the focused spine, but not the others', () => {
    press('ArrowRight', screen.getByRole('slider'));
    press('+', screen.getByRole('slider'));
    expect(keys.step).not.toHaveBeenCalled();
    expect(keys.zoom).toHaveBeenCalledOnce();
  });
});
