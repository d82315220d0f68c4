import { View } from 'react-native';
import type { CSSProperties } from 'react';
import { Text, UnitText } from '../primitives';
import { radius, useTheme } from '../tokens';

export interface FirstLinesProps {
  names: readonly string[] | null;
  units: readonly string[] | null;
  /** What each column is taken for, in a word or two; '' when it is left out. */
  uses: readonly string[];
  rows: readonly (readonly string[])[];
}

/** The first lines of a file as a table; scrolls sideways inside its own box. */
export function FirstLines({ names, units, uses, rows }: FirstLinesProps) {
  const { colour } = useTheme();
  const width = Math.max(uses.length, ...rows.map((row) => row.length), 0);
  const cell: CSSProperties = {
    padding: '5px 10px',
    borderLeft: `1px solid ${colour.hair}`,
    borderBottom: `1px solid ${colour.hair}`,
    textAlign: 'right',
    whiteSpace: 'nowrap',
  };
  const columns = Array.from({ length: width }, (_, index) => index);
  return (
    <View style={{ alignSelf: 'stretch', minWidth: 0 }}>
      <div
        tabIndex={0}
        role="region"
        aria-label="First lines of the file"
        style={{ overflowX: 'auto', border: `1px solid ${colour.rule}`, borderRadius: radius }}
      >
        <table style={{ borderCollapse: 'collapse', width: '100%' }}>
          <thead>
            <tr style={{ background: colour.wash }}>
              {columns.map((index) => (
                <th key={index} scope="col" style={{ ...cell, verticalAlign: 'top' }}>
                  <Text variant="figure" size={13} strong>
                    {names?.[index] || `column ${index + 1}`}
                  </Text>
                  {units?.[index] ? (
                    <div>
                      <Text variant="figure" size={12} soft>
                        {units[index]}
                      </Text>
                    </div>
                  ) : null}
                  <div>
                    <Text variant="label" size={12} soft={!uses[index]}>
                      <UnitText>{uses[index] || 'left out'}</UnitText>
                    </Text>
                  </div>
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {rows.map((row, line) => (
              <tr key={line}>
                {columns.map((index) => (
                  <td key={index} style={cell}>
                    <Text variant="figure" size={13}>
                      {row[index] ?? ''}
                    </Text>
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </View>
  );
}
