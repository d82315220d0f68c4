import { Pressable, View } from 'react-native';
import type { ReactNode } from 'react';
import { face, frame, motion, radius, useTheme, useWide, webStyle } from '../tokens';
import { linkProps } from './follow-link';
import { Text } from './Text';

export type ButtonKind = 'primary' | 'secondary' | 'quiet';

export interface ButtonProps {
  label: string;
  onPress?: () => void;
  /** Leads to a page instead of doing something here. */
  href?: string;
  /** One filled button a view at most; default secondary (outlined); quiet is underlined text. */
  kind?: ButtonKind;
  disabled?: boolean;
  /** Why it cannot be pressed now; shown below and read out. Disables the button. */
  disabledReason?: string;
  /** Work is going on: cannot be pressed, says so. */
  busy?: boolean;
  busyLabel?: string;
  /** An icon before the words, never alone (see IconButton). */
  icon?: ReactNode;
  /** As wide as its container. */
  wide?: boolean;
  /** Spoken name when the words alone are not enough ("Open evidence of FC"). */
  ariaLabel?: string;
  ariaExpanded?: boolean;
  testID?: string;
}

export function Button(props: ButtonProps) {
  const { kind = 'secondary' } = props;
  const { colour } = useTheme();
  const isWideLayout = useWide();
  const isOff = props.disabled === true || props.disabledReason !== undefined || props.busy === true;
  const ink = kind === 'primary' ? colour.panel : colour.ink;
  const words = props.busy ? (props.busyLabel ?? `${props.label} …`) : props.label;

  const pressable = (
    <Pressable
      role={props.href && !isOff ? undefined : 'button'}
      aria-label={props.ariaLabel}
      aria-disabled={isOff || undefined}
      aria-busy={props.busy || undefined}
      aria-expanded={props.ariaExpanded}
      disabled={isOff}
      testID={props.testID}
      {...(props.href && !isOff ? linkProps(props.href) : { onPress: props.onPress })}
      style={({ hovered, pressed }: { hovered?: boolean; pressed: boolean }) => [
        {
          flexDirection: 'row',
          alignItems: 'center',
          justifyContent: 'center',
          gap: 8,
          minHeight: isWideLayout && !props.wide ? frame.pointerTarget : frame.phoneTarget,
          paddingHorizontal: kind === 'quiet' ? 8 : 16,
          borderRadius: radius,
          borderWidth: 1,
          borderStyle: props.busy ? 'dashed' : 'solid',
          borderColor: kind === 'quiet' ? 'transparent' : isOff ? colour.rule : colour.ink,
          backgroundColor:
            kind === 'primary' && !isOff ? colour.ink : hovered || pressed ? colour.wash : 'transparent',
          alignSelf: props.wide ? 'stretch' : 'flex-start',
        },
        kind === 'primary' && (hovered || pressed) && !isOff && { opacity: 0.88 },
        webStyle({
          transition: `background-color ${motion.controlMs}ms ease-out`,
          cursor: isOff ? 'not-allowed' : 'pointer',
        }),
      ]}
    >
      {props.icon}
      <Text
        variant="label"
        size={kind === 'primary' && props.wide ? 16 : 14}
        colour={isOff ? colour.inkSoft : ink}
        style={[
          { fontFamily: face.label },
          kind === 'quiet' &&
            webStyle({ textDecorationLine: 'underline', textUnderlineOffset: '4px', whiteSpace: 'nowrap' }),
          kind !== 'quiet' && { textAlign: 'center' },
        ]}
      >
        {words}
      </Text>
    </Pressable>
  );

  if (!props.disabledReason) return pressable;
  return (
    <View style={{ gap: 4, alignSelf: props.wide ? 'stretch' : 'flex-start' }}>
      {pressable}
      <Text variant="small" soft>
        {props.disabledReason}
      </Text>
    </View>
  );
}

/** Buttons side by side; on a narrow container they wrap. */
export function ButtonRow({ children, align = 'left' }: { children: ReactNode; align?: 'left' | 'right' }) {
  return (
    <View
      style={{
        flexDirection: 'row',
        flexWrap: 'wrap',
        gap: 12,
        alignItems: 'flex-start',
        justifyContent: align === 'right' ? 'flex-end' : 'flex-start',
      }}
    >
      {children}
    </View>
  );
}
