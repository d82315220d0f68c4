import type { ReactNode } from 'react';
import { Button } from './Button';
import { Sheet } from './Sheet';
import { Text } from './Text';

export interface ConfirmSheetProps {
  open: boolean;
  /** The question: "Withdraw this raw file?" */
  title: string;
  /** What will change, and what will not. */
  children?: ReactNode;
  confirmLabel: string;
  onConfirm: () => void;
  onClose: () => void;
  cancelLabel?: string;
  busy?: boolean;
  disabledReason?: string;
}

export function ConfirmSheet(props: ConfirmSheetProps) {
  return (
    <Sheet
      open={props.open}
      title={props.title}
      onClose={props.onClose}
      actions={
        <>
          <Button
            kind="primary"
            label={props.confirmLabel}
            onPress={props.onConfirm}
            busy={props.busy}
            disabledReason={props.disabledReason}
          />
          <Button label={props.cancelLabel ?? 'Leave it'} onPress={props.onClose} />
        </>
      }
    >
      {typeof props.children === 'string' ? <Text>{props.children}</Text> : props.children}
    </Sheet>
  );
}
