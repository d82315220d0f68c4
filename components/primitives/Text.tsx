import { Text as NativeText } from 'react-native';
import type { StyleProp, TextStyle } from 'react-native';
import type { ReactNode } from 'react';
import { face, figureFeatures, useTheme, useWide } from '../tokens';

export type TextVariant = 'verdict' | 'title' | 'section' | 'part' | 'body' | 'small' | 'label' | 'figure';

interface TextShape {
  family: string;
  weight: '400' | '600';
  wide: number;
  phone: number;
  lineHeight: number;
}

const shapes: Record<TextVariant, TextShape> = {
  verdict: { family: face.text, weight: '600', wide: 26, phone: 21, lineHeight: 1.25 },
  title: { family: face.text, weight: '600', wide: 28, phone: 24, lineHeight: 1.2 },
  section: { family: face.text, weight: '600', wide: 21, phone: 19, lineHeight: 1.25 },
  part: { family: face.text, weight: '600', wide: 17, phone: 17, lineHeight: 1.3 },
  body: { family: face.text, weight: '400', wide: 15, phone: 15, lineHeight: 1.45 },
  small: { family: face.text, weight: '400', wide: 13, phone: 13, lineHeight: 1.4 },
  label: { family: face.label, weight: '600', wide: 13, phone: 13, lineHeight: 1.3 },
  figure: { family: face.figure, weight: '400', wide: 15, phone: 15, lineHeight: 1.35 },
};

const headingLevels: Partial<Record<TextVariant, number>> = { verdict: 1, title: 1, section: 2, part: 3 };

export interface TextProps {
  children?: ReactNode;
  /** Which role of the type scale; default body. */
  variant?: TextVariant;
  /** inkSoft instead of ink. */
  soft?: boolean;
  /** Weight 600. */
  strong?: boolean;
  align?: 'left' | 'center' | 'right';
  /** Never break inside. */
  nowrap?: boolean;
  /** Struck through: an old value that was corrected, kept in sight. */
  struck?: boolean;
  /** px, where the scale has a special size (axis 12, unit 11). */
  size?: number;
  /** Any colour of the theme, for quality words. */
  colour?: string;
  /**
   * Heading level. Verdict and title are h1 (one a page), section h2, part h3 unless said otherwise;
   * 0 makes plain text of it.
   */
  level?: 0 | 1 | 2 | 3 | 4;
  nativeID?: string;
  /** Reads changes of this text to a screen reader. */
  live?: 'polite' | 'assertive';
  numberOfLines?: number;
  ariaHidden?: boolean;
  style?: StyleProp<TextStyle>;
  testID?: string;
}

/** All text goes through here, so that faces, sizes and heading levels stay the scale's. */
export function Text(props: TextProps) {
  const { variant = 'body', level = headingLevels[variant] ?? 0 } = props;
  const theme = useTheme();
  const wide = useWide();
  const shape = shapes[variant];
  const size = props.size ?? (wide ? shape.wide : shape.phone);
  return (
    <NativeText
      nativeID={props.nativeID}
      testID={props.testID}
      numberOfLines={props.numberOfLines}
      aria-live={props.live}
      aria-hidden={props.ariaHidden}
      {...(level > 0 ? { role: 'heading' as const, 'aria-level': level } : {})}
      style={[
        {
          color: props.colour ?? (props.soft ? theme.colour.inkSoft : theme.colour.ink),
          fontFamily: shape.family,
          fontSize: size,
          fontWeight: props.strong ? '600' : shape.weight,
          lineHeight: Math.round(size * shape.lineHeight * 10) / 10,
          textAlign: props.align,
        },
        variant === 'figure' && figureFeatures,
        (props.nowrap || variant === 'figure') && nowrapStyle,
        props.struck && { textDecorationLine: 'line-through' },
        props.style,
      ]}
    >
      {props.children}
    </NativeText>
  );
}

const nowrapStyle = { whiteSpace: 'nowrap' } as unknown as TextStyle;
