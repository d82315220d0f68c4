import { useId, useState } from 'react';
import type { CSSProperties, DragEvent } from 'react';
import { Text } from '../primitives';
import { radius, useTheme, useWide } from '../tokens';

export interface FilePickerProps {
  onFiles: (files: File[]) => void;
  disabledReason?: string;
}

/** A place to drop raw files, and a file input for those who choose or use the keyboard. */
export function FilePicker({ onFiles, disabledReason }: FilePickerProps) {
  const { colour } = useTheme();
  const wide = useWide();
  const [isOver, setIsOver] = useState(false);
  const [isFocused, setIsFocused] = useState(false);
  const helpId = useId();
  const isOff = disabledReason !== undefined;

  const take = (list: FileList | null): void => {
    const files = [...(list ?? [])].filter((file) => file.size > 0 || file.type !== '');
    if (files.length > 0) onFiles(files);
  };
  const onDrop = (event: DragEvent): void => {
    event.preventDefault();
    setIsOver(false);
    if (!isOff) take(event.dataTransfer.files);
  };
  const style: CSSProperties = {
    position: 'relative',
    boxSizing: 'border-box',
    minHeight: wide ? 132 : 104,
    display: 'flex',
    flexDirection: 'column',
    alignItems: 'center',
    justifyContent: 'center',
    gap: 6,
    padding: 16,
    textAlign: 'center',
    border: `2px dashed ${isOver ? colour.ink : colour.rule}`,
    borderRadius: radius,
    background: isOver
      ? colour.wash
      : `repeating-linear-gradient(transparent 0 21px, ${colour.hair} 21px 22px)`,
    cursor: isOff ? 'not-allowed' : 'pointer',
    // the input itself is invisible, so its ring stands round the box
    outline: isFocused ? `2px solid ${colour.beam}` : 'none',
    outlineOffset: 2,
  };
  const paper: CSSProperties = { background: colour.panel, padding: '0 8px' };
  return (
    <label
      className="gb-drop"
      style={style}
      onDragOver={(event) => {
        event.preventDefault();
        if (!isOff) setIsOver(true);
      }}
      onDragLeave={() => setIsOver(false)}
      onDrop={onDrop}
    >
      <span style={paper}>
        <Text variant="part" level={0}>
          {wide ? 'Drop raw files here, or choose them' : 'Choose raw files'}
        </Text>
      </span>
      <span style={paper} id={helpId}>
        <Text variant="small" soft>
          {disabledReason ??
            'Text, one row a scan, plain or gzip; one or many. Nothing is sent before you have seen how they read.'}
        </Text>
      </span>
      <input
        type="file"
        multiple
        disabled={isOff}
        aria-label="Choose raw files"
        aria-describedby={helpId}
        style={{
          position: 'absolute',
          inset: 0,
          opacity: 0,
          cursor: 'inherit',
          width: '100%',
          height: '100%',
        }}
        onFocus={(event) => setIsFocused(event.target.matches(':focus-visible'))}
        onBlur={() => setIsFocused(false)}
        onChange={(event) => {
          take(event.target.files);
          event.target.value = '';
        }}
      />
    </label>
  );
}
