import { Pressable } from 'react-native';
import type { ReactNode } from 'react';
import { frame, radius, useTheme, useWide, webStyle } from '../tokens';

export interface IconButtonProps {
  /** What it does; the accessible name and the tooltip. */
  label: string;
  icon: ReactNode;
  onPress: () => void;
  disabled?: boolean;
  /** Without border, for toolbars that draw their own. */
  bare?: boolean;
  ariaPressed?: boolean;
  ariaExpanded?: boolean;
  testID?: string;
}

export function IconButton(props: IconButtonProps) {
  const { colour } = useTheme();
  const side = useWide() ? frame.pointerTarget : frame.phoneTarget;
  return (
    <Pressable
      role="button"
      aria-label={props.label}
      aria-disabled={props.disabled || undefined}
      aria-pressed={props.ariaPressed}
      aria-expanded={props.ariaExpanded}
      disabled={props.disabled}
      onPress={props.onPress}
      testID={props.testID}
      {...({ title: props.label } as object)}
      style={({ hovered, pressed }: { hovered?: boolean; pressed: boolean }) => [
        {
          width: side,
          height: side,
          alignItems: 'center',
          justifyContent: 'center',
          borderRadius: radius,
          borderWidth: props.bare ? 0 : 1,
          borderColor: colour.rule,
          backgroundColor: props.ariaPressed ? colour.ink : hovered || pressed ? colour.wash : 'transparent',
          opacity: props.disabled ? 0.45 : 1,
        },
        webStyle({ cursor: props.disabled ? 'not-allowed' : 'pointer' }),
      ]}
    >
      {props.icon}
    </Pressable>
  );
}
