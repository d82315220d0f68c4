import { useId, useState } from 'react';
import { View } from 'react-native';
import { Controller } from 'react-hook-form';
import type { Control, FieldPath, FieldValues } from 'react-hook-form';
import type { CSSProperties, HTMLInputAutoCompleteAttribute, ReactNode } from 'react';
import { face, frame, radius, useTheme, useWide } from '../tokens';
import { formatPlain, parseDecimal } from '../format/numbers';
import { Text } from './Text';
import { UnitText } from './UnitText';

/*
 * Every field: label above, input, error, then the line that says why it matters. The label is tied by
 * id and aria-labelledby, help and error by aria-describedby; an error is announced when it appears.
 */

interface FieldIds {
  input: string;
  label: string;
  help: string;
  error: string;
}

function useFieldIds(): FieldIds {
  const base = useId();
  return { input: `${base}-input`, label: `${base}-label`, help: `${base}-help`, error: `${base}-error` };
}

interface FieldFrameProps {
  ids: FieldIds;
  label: string;
  help?: ReactNode;
  error?: string;
  optional?: boolean;
  /** A word beside the label: "changed". */
  mark?: string;
  children: ReactNode;
}

function FieldFrame({ ids, label, help, error, optional, mark, children }: FieldFrameProps) {
  const { colour } = useTheme();
  return (
    <View style={{ alignSelf: 'stretch' }}>
      <View style={{ flexDirection: 'row', gap: 8, alignItems: 'baseline', marginBottom: 6 }}>
        <label id={ids.label} htmlFor={ids.input}>
          <Text variant="label">{label}</Text>
        </label>
        {optional ? (
          <Text variant="small" soft>
            may stay empty
          </Text>
        ) : null}
        {mark ? (
          <View style={{ borderBottomWidth: 2, borderBottomColor: colour.beam }}>
            <Text variant="small">{mark}</Text>
          </View>
        ) : null}
      </View>
      {children}
      <div id={ids.error} role="alert" style={{ marginTop: error ? 6 : 0 }}>
        {error ? (
          <Text variant="small" strong>
            {error}
          </Text>
        ) : null}
      </div>
      {help ? (
        <div id={ids.help} style={{ marginTop: 6 }}>
          <Text variant="small" soft>
            {help}
          </Text>
        </div>
      ) : null}
    </View>
  );
}

function useInputStyle(hasError: boolean): CSSProperties {
  const { colour } = useTheme();
  const wide = useWide();
  return {
    boxSizing: 'border-box',
    width: '100%',
    minWidth: 0,
    height: wide ? 44 : frame.phoneTarget,
    padding: '0 14px',
    border: `${hasError ? 2 : 1}px solid ${hasError ? colour.ink : colour.rule}`,
    borderRadius: radius,
    background: colour.panel,
    color: colour.ink,
    fontFamily: face.text,
    fontSize: 16,
  };
}

function describedBy(ids: FieldIds, help: ReactNode, error: string | undefined): string | undefined {
  return [error ? ids.error : '', help ? ids.help : ''].filter(Boolean).join(' ') || undefined;
}

interface CommonFieldProps {
  label: string;
  /** Why it matters, or how to find it out. */
  help?: ReactNode;
  optional?: boolean;
  disabled?: boolean;
  mark?: string;
}

export interface TextInputProps extends CommonFieldProps {
  value: string;
  onChange: (value: string) => void;
  onBlur?: () => void;
  error?: string;
  type?: 'text' | 'email' | 'password' | 'date' | 'time' | 'datetime-local' | 'search';
  /** More than one line. */
  lines?: number;
  placeholder?: string;
  autoComplete?: HTMLInputAutoCompleteAttribute;
  name?: string;
  inputRef?: (element: HTMLInputElement | HTMLTextAreaElement | null) => void;
  /** At the right inside the box: "Show". */
  trailing?: ReactNode;
  /** Figures face: serial numbers, hashes, paths. */
  figure?: boolean;
}

/** A text input without a form around it. */
export function TextInput({ inputRef, ...props }: TextInputProps) {
  const ids = useFieldIds();
  const style = useInputStyle(props.error !== undefined);
  const shared = {
    id: ids.input,
    name: props.name,
    value: props.value,
    placeholder: props.placeholder,
    autoComplete: props.autoComplete,
    disabled: props.disabled,
    'aria-labelledby': ids.label,
    'aria-describedby': describedBy(ids, props.help, props.error),
    'aria-invalid': props.error ? true : undefined,
    onBlur: props.onBlur,
    onChange: (event: { target: { value: string } }) => props.onChange(event.target.value),
  };
  const figureStyle: CSSProperties = props.figure
    ? { fontFamily: face.figure, fontVariantLigatures: 'none' }
    : {};
  return (
    <FieldFrame
      ids={ids}
      label={props.label}
      help={props.help}
      error={props.error}
      optional={props.optional}
      mark={props.mark}
    >
      {props.lines && props.lines > 1 ? (
        <textarea
          {...shared}
          ref={inputRef}
          rows={props.lines}
          style={{
            ...style,
            ...figureStyle,
            height: 'auto',
            padding: '10px 14px',
            lineHeight: 1.45,
            resize: 'vertical',
          }}
        />
      ) : (
        <div style={{ position: 'relative' }}>
          <input
            {...shared}
            ref={inputRef}
            type={props.type ?? 'text'}
            style={{ ...style, ...figureStyle, paddingRight: props.trailing ? 84 : 14 }}
          />
          {props.trailing ? (
            <div
              style={{
                position: 'absolute',
                right: 2,
                top: 0,
                bottom: 0,
                display: 'flex',
                alignItems: 'center',
              }}
            >
              {props.trailing}
            </div>
          ) : null}
        </div>
      )}
    </FieldFrame>
  );
}

interface FormFieldProps<Values extends FieldValues> {
  control: Control<Values>;
  name: FieldPath<Values>;
}

export type TextFieldProps<Values extends FieldValues> = FormFieldProps<Values> &
  Omit<TextInputProps, 'value' | 'onChange' | 'onBlur' | 'error' | 'name' | 'inputRef'>;

/** Text in a react-hook-form. */
export function TextField<Values extends FieldValues>({ control, name, ...rest }: TextFieldProps<Values>) {
  return (
    <Controller
      control={control}
      name={name}
      render={({ field, fieldState }) => (
        <TextInput
          {...rest}
          name={name}
          value={(field.value as string | null | undefined) ?? ''}
          onChange={field.onChange}
          onBlur={field.onBlur}
          inputRef={field.ref}
          error={fieldState.error?.message}
        />
      )}
    />
  );
}

export interface NumberInputProps extends CommonFieldProps {
  /** null = empty; NaN = what is written is no number. */
  value: number | null;
  onChange: (value: number | null) => void;
  onBlur?: () => void;
  unit?: string;
  error?: string;
  name?: string;
  inputRef?: (element: HTMLInputElement | null) => void;
}

/** A number with its unit; takes comma or dot, and any of the minus signs. */
export function NumberInput({ inputRef, ...props }: NumberInputProps) {
  const ids = useFieldIds();
  const { colour } = useTheme();
  const error = props.error ?? (Number.isNaN(props.value) ? 'Write a number, for example 3.2.' : undefined);
  const style = useInputStyle(error !== undefined);
  const [typed, setTyped] = useState('');
  // what was typed stays as long as it means the form's value ("3.", "4,25"); a reset form writes its own
  const isTypedStill = Object.is(parseDecimal(typed), props.value) || Number.isNaN(props.value);
  const text = isTypedStill ? typed : formatPlain(props.value);

  return (
    <FieldFrame
      ids={ids}
      label={props.label}
      help={props.help}
      error={error}
      optional={props.optional}
      mark={props.mark}
    >
      <div style={{ display: 'flex', alignItems: 'center', position: 'relative' }}>
        <input
          id={ids.input}
          name={props.name}
          ref={inputRef}
          type="text"
          inputMode="decimal"
          autoComplete="off"
          value={text}
          disabled={props.disabled}
          aria-labelledby={props.unit ? `${ids.label} ${ids.input}-unit` : ids.label}
          aria-describedby={describedBy(ids, props.help, error)}
          aria-invalid={error ? true : undefined}
          onChange={(event) => {
            setTyped(event.target.value);
            props.onChange(parseDecimal(event.target.value));
          }}
          onBlur={props.onBlur}
          style={{
            ...style,
            fontFamily: face.figure,
            fontVariantLigatures: 'none',
            textAlign: 'right',
            paddingRight: props.unit ? 16 + props.unit.length * 8 : 14,
          }}
        />
        {props.unit ? (
          <span
            id={`${ids.input}-unit`}
            style={{ position: 'absolute', right: 12, pointerEvents: 'none', color: colour.inkSoft }}
          >
            <Text variant="small" soft>
              <UnitText>{props.unit}</UnitText>
            </Text>
          </span>
        ) : null}
      </div>
    </FieldFrame>
  );
}

export type NumberFieldProps<Values extends FieldValues> = FormFieldProps<Values> &
  Omit<NumberInputProps, 'value' | 'onChange' | 'onBlur' | 'error' | 'name' | 'inputRef'>;

/** A number in a react-hook-form: the form holds number, null (empty) or NaN (not a number). */
export function NumberField<Values extends FieldValues>({
  control,
  name,
  ...rest
}: NumberFieldProps<Values>) {
  return (
    <Controller
      control={control}
      name={name}
      render={({ field, fieldState }) => (
        <NumberInput
          {...rest}
          name={name}
          value={(field.value as number | null | undefined) ?? null}
          onChange={field.onChange}
          onBlur={field.onBlur}
          inputRef={field.ref}
          error={fieldState.error?.message}
        />
      )}
    />
  );
}

export interface Choice<Value extends string = string> {
  value: Value;
  label: string;
  disabled?: boolean;
}

export interface ChoiceInputProps<Value extends string = string> extends CommonFieldProps {
  value: Value | '';
  options: readonly Choice<Value>[];
  onChange: (value: Value) => void;
  onBlur?: () => void;
  error?: string;
  name?: string;
  /** Shown while nothing is chosen. */
  placeholder?: string;
  inputRef?: (element: HTMLSelectElement | null) => void;
}

/** One of many: a native select. */
export function ChoiceInput<Value extends string>({ inputRef, ...props }: ChoiceInputProps<Value>) {
  const ids = useFieldIds();
  const style = useInputStyle(props.error !== undefined);
  return (
    <FieldFrame
      ids={ids}
      label={props.label}
      help={props.help}
      error={props.error}
      optional={props.optional}
      mark={props.mark}
    >
      <select
        id={ids.input}
        name={props.name}
        ref={inputRef}
        value={props.value}
        disabled={props.disabled}
        aria-labelledby={ids.label}
        aria-describedby={describedBy(ids, props.help, props.error)}
        aria-invalid={props.error ? true : undefined}
        onChange={(event) => props.onChange(event.target.value as Value)}
        onBlur={props.onBlur}
        style={style}
      >
        {props.value === '' || props.placeholder !== undefined ? (
          <option value="" disabled={!props.optional}>
            {props.placeholder ?? 'Choose'}
          </option>
        ) : null}
        {props.options.map((option) => (
          <option key={option.value} value={option.value} disabled={option.disabled}>
            {option.label}
          </option>
        ))}
      </select>
    </FieldFrame>
  );
}

export type ChoiceFieldProps<Values extends FieldValues> = FormFieldProps<Values> &
  Omit<ChoiceInputProps, 'value' | 'onChange' | 'onBlur' | 'error' | 'name' | 'inputRef'>;

export function ChoiceField<Values extends FieldValues>({
  control,
  name,
  ...rest
}: ChoiceFieldProps<Values>) {
  return (
    <Controller
      control={control}
      name={name}
      render={({ field, fieldState }) => (
        <ChoiceInput
          {...rest}
          name={name}
          value={(field.value as string | null | undefined) ?? ''}
          onChange={field.onChange}
          onBlur={field.onBlur}
          inputRef={field.ref}
          error={fieldState.error?.message}
        />
      )}
    />
  );
}

export interface SegmentChoiceProps<Value extends string = string> extends CommonFieldProps {
  value: Value | null;
  /** Two to five short choices. */
  options: readonly Choice<Value>[];
  onChange: (value: Value) => void;
  /** The choice before: keeps a grey underline and "was". */
  was?: Value | null;
  error?: string;
  /** The label is there for the ear only. */
  hideLabel?: boolean;
}

/** One of a few, all in sight; arrow keys move, as in any radio group. */
export function SegmentChoice<Value extends string>(props: SegmentChoiceProps<Value>) {
  const { colour } = useTheme();
  const wide = useWide();
  const base = useId();
  const isChanged = props.was !== undefined && props.was !== null && props.was !== props.value;
  return (
    <fieldset
      aria-describedby={props.help ? `${base}-help` : undefined}
      style={{ border: 0, margin: 0, padding: 0, minWidth: 0, alignSelf: 'stretch' }}
    >
      <legend className={props.hideLabel ? 'gb-unseen' : undefined} style={{ padding: 0, marginBottom: 6 }}>
        <View style={{ flexDirection: 'row', gap: 8, alignItems: 'baseline' }}>
          <Text variant="label">{props.label}</Text>
          {isChanged || props.mark ? (
            <View style={{ borderBottomWidth: 2, borderBottomColor: colour.beam }}>
              <Text variant="small">{props.mark ?? 'changed'}</Text>
            </View>
          ) : null}
        </View>
      </legend>
      <div
        style={{
          display: wide ? 'inline-flex' : 'flex',
          flexWrap: 'wrap',
          border: `1px solid ${colour.rule}`,
          borderRadius: radius,
          maxWidth: '100%',
        }}
      >
        {props.options.map((option, index) => {
          const isOn = option.value === props.value;
          const isFormer = isChanged && option.value === props.was;
          return (
            <label
              key={option.value}
              className="gb-segment"
              style={{
                position: 'relative',
                display: 'flex',
                flex: '1 0 auto',
                alignItems: 'center',
                justifyContent: 'center',
                gap: 6,
                boxSizing: 'border-box',
                minHeight: wide ? 34 : frame.phoneTarget,
                padding: '0 12px',
                borderLeft: index === 0 ? 0 : `1px solid ${colour.hair}`,
                background: isOn ? colour.ink : 'transparent',
                boxShadow: isFormer ? `inset 0 -3px 0 ${colour.rule}` : undefined,
                cursor: option.disabled || props.disabled ? 'not-allowed' : 'pointer',
              }}
            >
              <input
                type="radio"
                className="gb-unseen"
                name={base}
                value={option.value}
                aria-label={isFormer ? `${option.label}, was` : undefined}
                checked={isOn}
                disabled={props.disabled || option.disabled}
                onChange={() => props.onChange(option.value)}
              />
              <Text
                variant="label"
                nowrap
                colour={isOn ? colour.panel : isFormer ? colour.ink : colour.inkSoft}
              >
                {option.label}
              </Text>
              {isFormer ? (
                <Text variant="small" size={12}>
                  was
                </Text>
              ) : null}
            </label>
          );
        })}
      </div>
      <div role="alert">
        {props.error ? (
          <Text variant="small" strong>
            {props.error}
          </Text>
        ) : null}
      </div>
      {props.help ? (
        <div id={`${base}-help`} style={{ marginTop: 6 }}>
          <Text variant="small" soft>
            {props.help}
          </Text>
        </div>
      ) : null}
    </fieldset>
  );
}

export type SegmentFieldProps<Values extends FieldValues> = FormFieldProps<Values> &
  Omit<SegmentChoiceProps, 'value' | 'onChange' | 'error'>;

export function SegmentField<Values extends FieldValues>({
  control,
  name,
  ...rest
}: SegmentFieldProps<Values>) {
  return (
    <Controller
      control={control}
      name={name}
      render={({ field, fieldState }) => (
        <SegmentChoice
          {...rest}
          value={(field.value as string | null | undefined) ?? null}
          onChange={field.onChange}
          error={fieldState.error?.message}
        />
      )}
    />
  );
}

export interface CheckInputProps extends Omit<CommonFieldProps, 'optional'> {
  value: boolean;
  onChange: (value: boolean) => void;
  onBlur?: () => void;
  error?: string;
  name?: string;
  inputRef?: (element: HTMLInputElement | null) => void;
}

export function CheckInput({ inputRef, ...props }: CheckInputProps) {
  const { colour } = useTheme();
  const wide = useWide();
  const ids = useFieldIds();
  return (
    <View style={{ alignSelf: 'stretch' }}>
      <label
        style={{
          display: 'inline-flex',
          alignItems: 'center',
          gap: 10,
          minHeight: wide ? 34 : frame.phoneTarget,
          cursor: props.disabled ? 'not-allowed' : 'pointer',
        }}
      >
        <input
          id={ids.input}
          name={props.name}
          ref={inputRef}
          type="checkbox"
          checked={props.value}
          disabled={props.disabled}
          aria-labelledby={ids.label}
          aria-describedby={describedBy(ids, props.help, props.error)}
          onChange={(event) => props.onChange(event.target.checked)}
          onBlur={props.onBlur}
          style={{ width: 18, height: 18, margin: 0, flex: 'none', accentColor: colour.ink }}
        />
        <span id={ids.label}>
          <Text variant="label">{props.label}</Text>
        </span>
      </label>
      <div id={ids.error} role="alert">
        {props.error ? (
          <Text variant="small" strong>
            {props.error}
          </Text>
        ) : null}
      </div>
      {props.help ? (
        <div id={ids.help}>
          <Text variant="small" soft>
            {props.help}
          </Text>
        </div>
      ) : null}
    </View>
  );
}

export type CheckFieldProps<Values extends FieldValues> = FormFieldProps<Values> &
  Omit<CheckInputProps, 'value' | 'onChange' | 'onBlur' | 'error' | 'name' | 'inputRef'>;

export function CheckField<Values extends FieldValues>({ control, name, ...rest }: CheckFieldProps<Values>) {
  return (
    <Controller
      control={control}
      name={name}
      render={({ field, fieldState }) => (
        <CheckInput
          {...rest}
          name={name}
          value={field.value === true}
          onChange={field.onChange}
          onBlur={field.onBlur}
          inputRef={field.ref}
          error={fieldState.error?.message}
        />
      )}
    />
  );
}
