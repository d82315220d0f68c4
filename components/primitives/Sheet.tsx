import { useEffect, useId, useRef } from 'react';
import { View } from 'react-native';
import type { CSSProperties, ReactNode } from 'react';
import { radius, space, useTheme, useWide } from '../tokens';
import { Icon } from './Icon';
import { IconButton } from './IconButton';
import { Rule } from './Rule';
import { Text } from './Text';

export interface SheetProps {
  open: boolean;
  title: string;
  subtitle?: ReactNode;
  onClose: () => void;
  children?: ReactNode;
  /** Stays in sight at the bottom. */
  actions?: ReactNode;
  /** px on wide; default 480. */
  width?: number;
  closeLabel?: string;
}

/**
 * A dialog: rises from below on a phone, stands in the middle on wide. The dialog element keeps focus
 * inside, closes on Esc and gives focus back to what opened it.
 */
export function Sheet(props: SheetProps) {
  const { open, onClose } = props;
  const { colour } = useTheme();
  const wide = useWide();
  const dialogRef = useRef<HTMLDialogElement>(null);
  const titleId = `sheet-${useId()}`;

  useEffect(() => {
    const dialog = dialogRef.current;
    if (!open || !dialog) return undefined;
    const opener = document.activeElement;
    // jsdom knows the element but not showModal
    if (typeof dialog.showModal === 'function') dialog.showModal();
    else dialog.setAttribute('open', '');
    return () => {
      if (opener instanceof HTMLElement && opener.isConnected) opener.focus();
    };
  }, [open]);

  if (!open) return null;

  const style: CSSProperties = {
    boxSizing: 'border-box',
    padding: 0,
    border: `1px solid ${colour.rule}`,
    borderRadius: radius,
    background: colour.panel,
    color: colour.ink,
    maxWidth: '100vw',
    overflow: 'hidden',
    ...(wide
      ? { width: props.width ?? 480, maxHeight: '86vh', margin: 'auto' }
      : {
          width: '100vw',
          maxHeight: '92dvh',
          margin: 'auto 0 0 0',
          borderLeftWidth: 0,
          borderRightWidth: 0,
          borderBottomWidth: 0,
          borderTop: `1px solid ${colour.ink}`,
        }),
  };

  return (
    <dialog
      ref={dialogRef}
      className={wide ? 'gb-dialog' : 'gb-dialog gb-rises'}
      aria-labelledby={titleId}
      style={style}
      onCancel={(event) => {
        event.preventDefault();
        onClose();
      }}
      onClick={(event) => {
        if (event.target === dialogRef.current) onClose();
      }}
    >
      <div style={{ display: 'flex', flexDirection: 'column', maxHeight: 'inherit' }}>
        <View
          style={{
            flexDirection: 'row',
            alignItems: 'flex-start',
            justifyContent: 'space-between',
            gap: space.m,
            padding: space.l,
            paddingBottom: space.m,
          }}
        >
          <View style={{ flex: 1, gap: 2 }}>
            <Text variant="section" level={2} nativeID={titleId}>
              {props.title}
            </Text>
            {props.subtitle ? (
              <Text variant="small" soft>
                {props.subtitle}
              </Text>
            ) : null}
          </View>
          <IconButton label={props.closeLabel ?? 'Close'} icon={<Icon name="close" />} onPress={onClose} />
        </View>
        <Rule double />
        <div style={{ overflowY: 'auto', flex: '1 1 auto', minHeight: 0 }}>
          <View style={{ padding: space.l, gap: space.l }}>{props.children}</View>
        </div>
        {props.actions ? (
          <View>
            <Rule faint />
            <View style={{ padding: space.l, gap: space.m, flexDirection: 'row', flexWrap: 'wrap' }}>
              {props.actions}
            </View>
          </View>
        ) : null}
      </div>
    </dialog>
  );
}
