import { Pressable, View } from 'react-native';
import type { ReactNode } from 'react';
import { frame, useTheme, useWide, webStyle } from '../tokens';
import type { GradeValue } from '../tokens';
import { formatNumber, formatUncertainty } from '../format/numbers';
import { linkProps } from './follow-link';
import { GradeMark } from './GradeMark';
import { Text } from './Text';
import { UnitText } from './UnitText';

/** Rows of values under each other: a table to a screen reader, hair rules to the eye. */
export function Ledger({ label, children }: { label: string; children: ReactNode }) {
  return (
    <View role="table" aria-label={label} style={{ alignSelf: 'stretch' }}>
      {children}
    </View>
  );
}

export interface ValueRowProps {
  /** Key of the quantity: FC, LE, u*. */
  label: string;
  /** Full precision; null or NaN shows as missing, never as zero. */
  value: number | null;
  decimals?: number;
  uncertainty?: number | null;
  unit?: string;
  /** undefined: this value carries no grade of its own. */
  grade?: GradeValue;
  /** The way to the evidence. */
  href?: string;
  onPress?: () => void;
  /** An older value: struck through before the new one, never removed. */
  formerValue?: number | null;
}

export function ValueRow(props: ValueRowProps) {
  const { colour } = useTheme();
  const wide = useWide();
  const decimals = props.decimals ?? 1;
  const hasValue = props.value !== null && Number.isFinite(props.value);
  const figure = hasValue ? formatNumber(props.value, decimals) : '';
  const leadsToEvidence = hasValue && (props.href !== undefined || props.onPress !== undefined);
  const figureText = (
    <Text
      variant="figure"
      align="right"
      style={
        leadsToEvidence &&
        webStyle({
          textDecorationLine: 'underline',
          textDecorationStyle: 'dotted',
          textDecorationColor: colour.inkSoft,
          textUnderlineOffset: '4px',
        })
      }
    >
      {figure}
    </Text>
  );
  const spoken = `Why ${props.label} is ${figure}${props.unit ? ` ${props.unit}` : ''}`;
  return (
    <View
      role="row"
      style={{
        flexDirection: 'row',
        alignItems: 'center',
        gap: wide ? 8 : 6,
        minHeight: wide ? 36 : frame.phoneTarget,
        paddingVertical: 4,
        borderBottomWidth: 1,
        borderBottomColor: colour.hair,
      }}
    >
      <View role="rowheader" style={{ flexBasis: wide ? 64 : 40, flexShrink: 1, flexGrow: 1, minWidth: 0 }}>
        <Text variant="label">
          <UnitText>{props.label}</UnitText>
        </Text>
      </View>
      <View role="cell" style={{ minWidth: 68, flexDirection: 'row', justifyContent: 'flex-end', gap: 6 }}>
        {props.formerValue !== undefined && props.formerValue !== null ? (
          <Text variant="figure" size={13} soft struck>
            {formatNumber(props.formerValue, decimals)}
          </Text>
        ) : null}
        {!hasValue ? (
          <Text variant="small" soft>
            missing
          </Text>
        ) : props.href ? (
          <Pressable aria-label={spoken} hitSlop={8} {...linkProps(props.href)}>
            {figureText}
          </Pressable>
        ) : props.onPress ? (
          <Pressable role="button" aria-label={spoken} onPress={props.onPress} hitSlop={8}>
            {figureText}
          </Pressable>
        ) : (
          figureText
        )}
      </View>
      <View role="cell" style={{ minWidth: 64 }}>
        <Text variant="figure" soft align="right">
          {hasValue && props.uncertainty !== undefined ? formatUncertainty(props.uncertainty, decimals) : ''}
        </Text>
      </View>
      <View role="cell" style={{ width: 86 }}>
        <Text variant="small" soft nowrap>
          {props.unit ? <UnitText>{props.unit}</UnitText> : null}
        </Text>
      </View>
      <View role="cell" style={{ width: 30, alignItems: 'flex-end' }}>
        {props.grade !== undefined ? <GradeMark grade={props.grade} /> : null}
      </View>
    </View>
  );
}

/** One fact: label left, text or figure right; for set-ups, files, runs. */
export function FactRow({ label, children }: { label: string; children: ReactNode }) {
  const { colour } = useTheme();
  return (
    <View
      style={{
        flexDirection: 'row',
        gap: 16,
        alignItems: 'baseline',
        justifyContent: 'space-between',
        paddingVertical: 7,
        borderBottomWidth: 1,
        borderBottomColor: colour.hair,
      }}
    >
      <Text variant="label" style={{ flexShrink: 0, maxWidth: '50%' }}>
        <UnitText>{label}</UnitText>
      </Text>
      <View style={{ flexShrink: 1, alignItems: 'flex-end', minWidth: 0 }}>
        {typeof children === 'string' ? <Text align="right">{children}</Text> : children}
      </View>
    </View>
  );
}
