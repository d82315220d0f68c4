import { useState } from 'react';
import { View } from 'react-native';
import type { CSSProperties } from 'react';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import { formatPlain, parseDecimal } from '../format/numbers';
import { Text, UnitText } from '../primitives';
import { face, radius, space, useTheme, useWide, webStyle } from '../tokens';
import { changeSetting, partWords, recipeParagraphs, settingAt } from './recipe-paragraph';
import type { ValuePart } from './recipe-paragraph';

export interface MethodsParagraphProps {
  settings: RecipeSettings;
  /** The recipe it is compared with; values that differ are marked. */
  former: RecipeSettings | null;
  /** Given: values can be changed where they stand. */
  onChange?: (settings: RecipeSettings) => void;
}

/** A recipe as it would stand in a paper; in place editable where that is allowed. */
export function MethodsParagraph({ settings, former, onChange }: MethodsParagraphProps) {
  const { colour } = useTheme();
  const wide = useWide();
  return (
    <View style={{ gap: space.xl }}>
      {recipeParagraphs(settings).map((paragraph) => (
        <View
          key={paragraph.key}
          style={{
            flexDirection: wide ? 'row' : 'column',
            gap: wide ? space.xl : space.s,
            borderTopWidth: 1,
            borderTopColor: colour.hair,
            paddingTop: space.m,
          }}
        >
          <View style={{ width: wide ? 176 : undefined, gap: 4 }}>
            <Text variant="part" level={2}>
              {paragraph.title}
            </Text>
            <Text variant="small" soft>
              {paragraph.why}
            </Text>
          </View>
          <View style={{ flex: wide ? 1 : undefined, minWidth: 0, maxWidth: 680 }}>
            <Text style={{ lineHeight: onChange ? (wide ? 38 : 52) : 28, fontSize: 16 }}>
              {paragraph.parts.map((part, index) =>
                typeof part === 'string' ? (
                  <UnitText key={index}>{part}</UnitText>
                ) : onChange ? (
                  <ValueInput
                    key={`${part.path}-${index}`}
                    settings={settings}
                    former={former}
                    part={part}
                    onChange={onChange}
                  />
                ) : (
                  <ValueWords key={`${part.path}-${index}`} settings={settings} former={former} part={part} />
                ),
              )}
            </Text>
          </View>
        </View>
      ))}
    </View>
  );
}

function isDifferent(settings: RecipeSettings, former: RecipeSettings | null, part: ValuePart): boolean {
  return former !== null && !Object.is(settingAt(settings, part.path), settingAt(former, part.path));
}

function ValueWords({
  settings,
  former,
  part,
}: {
  settings: RecipeSettings;
  former: RecipeSettings | null;
  part: ValuePart;
}) {
  const { colour } = useTheme();
  const differs = isDifferent(settings, former, part);
  const before =
    differs && former !== null && settingAt(former, part.path) !== undefined ? partWords(former, part) : null;
  return (
    <>
      {before !== null ? (
        <Text soft struck style={{ fontSize: 16 }}>
          <UnitText>{before}</UnitText>
        </Text>
      ) : null}
      {before !== null ? ' ' : ''}
      <Text
        strong
        style={webStyle({
          fontSize: 16,
          whiteSpace: 'nowrap',
          textDecoration: 'underline dotted 1px',
          textUnderlineOffset: '4px',
          textDecorationColor: differs ? colour.ink : colour.inkSoft,
          borderBottom: differs ? `2px solid ${colour.ink}` : undefined,
        })}
      >
        <UnitText>{partWords(settings, part)}</UnitText>
      </Text>
    </>
  );
}

function ValueInput({
  settings,
  former,
  part,
  onChange,
}: {
  settings: RecipeSettings;
  former: RecipeSettings | null;
  part: ValuePart;
  onChange: (settings: RecipeSettings) => void;
}) {
  const { colour } = useTheme();
  const wide = useWide();
  const at = settingAt(settings, part.path);
  const [text, setText] = useState(at === null ? '' : formatPlain(Number(at)));
  const differs = isDifferent(settings, former, part);
  const style: CSSProperties = {
    boxSizing: 'border-box',
    height: wide ? 32 : 44,
    padding: '0 8px',
    border: `1px solid ${colour.rule}`,
    borderBottom: differs ? `3px solid ${colour.ink}` : `1px solid ${colour.rule}`,
    borderRadius: radius,
    background: colour.panel,
    color: colour.ink,
    fontSize: 16,
    maxWidth: '100%',
  };
  if (part.choices) {
    return (
      <select
        aria-label={part.label}
        value={String(at)}
        onChange={(event) => onChange(changeSetting(settings, part, event.target.value))}
        style={{ ...style, fontFamily: face.text, fontWeight: 600 }}
      >
        {part.choices.map((candidate) => (
          <option key={candidate.value} value={candidate.value}>
            {candidate.label}
          </option>
        ))}
      </select>
    );
  }
  const parsed = parseDecimal(text);
  const isWrong = Number.isNaN(parsed) || (parsed === null && part.offWord === undefined);
  return (
    <span style={{ whiteSpace: 'nowrap' }}>
      <input
        aria-label={part.unit ? `${part.label}, ${part.unit}` : part.label}
        aria-invalid={isWrong || undefined}
        inputMode="decimal"
        autoComplete="off"
        value={text}
        placeholder={part.offWord}
        onChange={(event) => {
          setText(event.target.value);
          const number = parseDecimal(event.target.value);
          if (number === null ? part.offWord !== undefined : !Number.isNaN(number))
            onChange(changeSetting(settings, part, number));
          else onChange(changeSetting(settings, part, Number.NaN));
        }}
        style={{
          ...style,
          width: `${Math.max(part.offWord ? 8 : 4, text.length + 2)}ch`,
          fontFamily: face.figure,
          fontVariantLigatures: 'none',
          textAlign: 'right',
          borderColor: isWrong ? colour.ink : colour.rule,
          borderWidth: isWrong ? 2 : undefined,
        }}
      />
      {part.unit ? (
        <Text soft style={{ fontSize: 15 }}>
          {' '}
          <UnitText>{part.unit}</UnitText>
        </Text>
      ) : null}
    </span>
  );
}
