import { View } from 'react-native';
import type { CSSProperties, ReactNode } from 'react';
import { face, useTheme, useWide } from '../tokens';
import { Text } from './Text';

export interface DataColumn<Row> {
  key: string;
  head: ReactNode;
  /** Figures align right. */
  align?: 'left' | 'right';
  cell: (row: Row) => ReactNode;
  /** Left out on a phone. */
  wideOnly?: boolean;
  width?: number | string;
}

export interface DataTableProps<Row> {
  /** What the table lists; spoken. */
  caption: string;
  columns: readonly DataColumn<Row>[];
  rows: readonly Row[];
  rowKey: (row: Row) => string;
  /** On a phone each row as a block of its own instead of columns. */
  phoneRow?: (row: Row) => ReactNode;
}

/** A plain ruled table for up to a few hundred rows; strings become text, anything else is put as it is. */
export function DataTable<Row>({ caption, columns, rows, rowKey, phoneRow }: DataTableProps<Row>) {
  const { colour } = useTheme();
  const wide = useWide();
  if (!wide && phoneRow) {
    return (
      <View role="list" aria-label={caption} style={{ alignSelf: 'stretch' }}>
        {rows.map((row) => (
          <View
            role="listitem"
            key={rowKey(row)}
            style={{ paddingVertical: 12, borderBottomWidth: 1, borderBottomColor: colour.hair }}
          >
            {phoneRow(row)}
          </View>
        ))}
      </View>
    );
  }
  const shown = columns.filter((column) => wide || !column.wideOnly);
  const headStyle: CSSProperties = {
    font: `600 13px/1.3 ${face.label}`,
    color: colour.inkSoft,
    borderBottom: `1px solid ${colour.rule}`,
    padding: '7px 12px 7px 0',
    verticalAlign: 'bottom',
  };
  const cellStyle: CSSProperties = {
    borderBottom: `1px solid ${colour.hair}`,
    padding: '7px 12px 7px 0',
    verticalAlign: 'baseline',
  };
  return (
    <table style={{ width: '100%', borderCollapse: 'collapse' }} aria-label={caption}>
      <thead>
        <tr>
          {shown.map((column) => (
            <th
              key={column.key}
              scope="col"
              style={{ ...headStyle, textAlign: column.align ?? 'left', width: column.width }}
            >
              {column.head}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <tr key={rowKey(row)}>
            {shown.map((column) => {
              const content = column.cell(row);
              return (
                <td key={column.key} style={{ ...cellStyle, textAlign: column.align ?? 'left' }}>
                  {typeof content === 'string' || typeof content === 'number' ? (
                    <Text variant={column.align === 'right' ? 'figure' : 'body'}>{content}</Text>
                  ) : (
                    content
                  )}
                </td>
              );
            })}
          </tr>
        ))}
      </tbody>
    </table>
  );
}
