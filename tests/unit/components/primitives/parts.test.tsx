import { act, cleanup, fireEvent, render, screen } from '@testing-library/react';
import { useForm, useWatch } from 'react-hook-form';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { Button } from '../../../../components/primitives/Button';
import { NumberField, SegmentChoice, TextInput } from '../../../../components/primitives/Field';
import { GradeMark } from '../../../../components/primitives/GradeMark';
import { LimitBar } from '../../../../components/primitives/LimitBar';
import { Ledger, ValueRow } from '../../../../components/primitives/ValueRow';

const { push } = vi.hoisted(() => ({ push: vi.fn() }));
vi.mock('expo-router', () => ({ router: { push } }));

afterEach(() => {
  cleanup();
  push.mockReset();
});

interface MastForm {
  heightM: number | null;
}

function MastHeight({ onValue }: { onValue: (value: number | null) => void }) {
  const form = useForm<MastForm>({ defaultValues: { heightM: 3.2 } });
  onValue(useWatch({ control: form.control, name: 'heightM' }));
  return (
    <>
      <NumberField
        control={form.control}
        name="heightM"
        label="Sonic height"
        unit="m"
        help="Sets the scale of the eddies."
      />
      <button onClick={() => form.reset({ heightM: 31 })}>reset</button>
    </>
  );
}

describe('a number field', () => {
  it('takes a comma, keeps what is typed, and hands the number to the form', () => {
    const onValue = vi.fn();
    render(<MastHeight onValue={onValue} />);
    const input = screen.getByRole('textbox', { name: /Sonic height/ }) as HTMLInputElement;
    expect(input.value).toBe('3.2');
    fireEvent.change(input, { target: { value: '4,' } });
    expect(input.value).toBe('4,');
    fireEvent.change(input, { target: { value: '4,25' } });
    expect(input.value).toBe('4,25');
    expect(onValue).toHaveBeenLastCalledWith(4.25);
  });

  it('says so when it is no number, and tells empty from wrong', () => {
    const onValue = vi.fn();
    render(<MastHeight onValue={onValue} />);
    const input = screen.getByRole('textbox', { name: /Sonic height/ });
    fireEvent.change(input, { target: { value: 'three' } });
    expect(onValue).toHaveBeenLastCalledWith(Number.NaN);
    expect(screen.getByRole('alert').textContent).toMatch(/Write a number/);
    expect(input.getAttribute('aria-invalid')).toBe('true');
    fireEvent.change(input, { target: { value: '' } });
    expect(onValue).toHaveBeenLastCalledWith(null);
    expect(input.getAttribute('aria-invalid')).toBeNull();
  });

  it('follows the form when it is reset', () => {
    render(<MastHeight onValue={() => undefined} />);
    act(() => screen.getByText('reset').click());
    expect((screen.getByRole('textbox') as HTMLInputElement).value).toBe('31');
  });

  it('ties unit, help and error to the input', () => {
    render(<MastHeight onValue={() => undefined} />);
    const input = screen.getByRole('textbox', { name: 'Sonic height m' });
    const described = (input.getAttribute('aria-describedby') ?? '')
      .split(' ')
      .map((id) => document.getElementById(id));
    expect(described.map((element) => element?.textContent)).toEqual(['Sets the scale of the eddies.']);
  });
});

describe('other inputs', () => {
  it('announce an error beside the field', () => {
    render(<TextInput label="Name" value="" onChange={() => undefined} error="Write a name." />);
    expect(screen.getByRole('alert').textContent).toBe('Write a name.');
    expect(screen.getByRole('textbox', { name: 'Name' }).getAttribute('aria-describedby')).toBe(
      screen.getByRole('alert').id,
    );
  });

  it('a segment choice is a radio group that names what was chosen before', () => {
    const onChange = vi.fn();
    render(
      <SegmentChoice
        label="Detrend"
        value="linear"
        was="block"
        onChange={onChange}
        options={[
          { value: 'block', label: 'block mean' },
          { value: 'linear', label: 'linear' },
        ]}
      />,
    );
    expect((screen.getByRole('radio', { name: /linear/ }) as HTMLInputElement).checked).toBe(true);
    fireEvent.click(screen.getByRole('radio', { name: /block mean, was/ }));
    expect(onChange).toHaveBeenCalledWith('block');
  });
});

describe('a button', () => {
  it('does its work, and not while it is off or busy', () => {
    const onPress = vi.fn();
    const { rerender } = render(<Button label="Compute" onPress={onPress} />);
    fireEvent.click(screen.getByRole('button', { name: 'Compute' }));
    expect(onPress).toHaveBeenCalledTimes(1);
    rerender(<Button label="Compute" onPress={onPress} disabledReason="Only an analyst can compute." />);
    fireEvent.click(screen.getByRole('button', { name: 'Compute' }));
    rerender(<Button label="Compute" onPress={onPress} busy />);
    fireEvent.click(screen.getByRole('button'));
    expect(onPress).toHaveBeenCalledTimes(1);
  });

  it('says why it is off', () => {
    render(<Button label="Compute" disabledReason="Only an analyst can compute." />);
    expect(screen.getByText('Only an analyst can compute.')).toBeTruthy();
  });

  it('that leads somewhere is a link that the router follows, unless a new tab is asked for', () => {
    render(<Button label="Open evidence" href="/g/lowmere/s/hollin-fen/series" />);
    const link = screen.getByRole('link', { name: 'Open evidence' });
    expect(link.getAttribute('href')).toBe('/g/lowmere/s/hollin-fen/series');
    fireEvent.click(link, { ctrlKey: true });
    expect(push).not.toHaveBeenCalled();
    fireEvent.click(link);
    expect(push).toHaveBeenCalledWith('/g/lowmere/s/hollin-fen/series');
  });

  it('leaves downloads from the server to the browser', () => {
    render(<Button label="Export" href="/api/groups/lowmere/runs/1/export" />);
    fireEvent.click(screen.getByRole('link', { name: 'Export' }));
    expect(push).not.toHaveBeenCalled();
  });
});

describe('values and grades', () => {
  it('speak their grade by word, not by shape or colour', () => {
    render(<GradeMark grade={2} />);
    expect(screen.getByRole('img', { name: '2 rejected' })).toBeTruthy();
  });

  it('a value row leads to its evidence and shows value, uncertainty and unit', () => {
    render(
      <Ledger label="Fluxes">
        <ValueRow
          label="FC"
          value={-12.24}
          uncertainty={1.94}
          unit="µmol m-2 s-1"
          grade={2}
          href="/evidence"
        />
      </Ledger>,
    );
    expect(screen.getByRole('row').textContent).toBe('FC\u221212.2± 1.9µmol m\u22122 s\u221212');
    expect(screen.getByRole('link', { name: /Why FC is \u221212.2/ }).getAttribute('href')).toBe('/evidence');
  });

  it('a missing value is called missing, never zero', () => {
    render(<ValueRow label="H" value={null} uncertainty={4} unit="W m-2" grade={null} href="/evidence" />);
    expect(screen.getByText('missing')).toBeTruthy();
    expect(screen.queryByRole('link')).toBeNull();
    expect(screen.getByRole('row').textContent).toBe('HmissingW m\u22122');
  });

  it('a limit bar says value, both limits and grade in words', () => {
    render(
      <LimitBar label="Steady-state deviation" value={47} unit="%" grade={1} softHigh={30} hardHigh={100} />,
    );
    expect(
      screen.getByRole('img', {
        name: 'Steady-state deviation: 47 %, good up to 30, rejected above 100; 1 usable',
      }),
    ).toBeTruthy();
  });
});
