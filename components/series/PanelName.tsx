import { memo } from 'react';
import { View } from 'react-native';
import { quantity } from '../../processing/catalogue';
import { lookColour, lookDash, panelLook } from '../plots/panel-looks';
import { Text, UnitText } from '../primitives';
import { useTheme } from '../tokens';

/** Key, meaning, unit and dash sample left of a panel's axis. */
export const PanelName = memo(function PanelName({
  quantityKey,
  width,
}: {
  quantityKey: string;
  width: number;
}) {
  const entry = quantity(quantityKey);
  return (
    <View style={{ width, paddingTop: 2, gap: 3 }}>
      <Text variant="label" size={15}>
        <UnitText>{entry.symbol}</UnitText>
      </Text>
      <Text variant="small" size={12} soft style={{ lineHeight: 14 }}>
        <UnitText>{entry.label}</UnitText>
      </Text>
      <Text variant="figure" size={11} soft>
        <UnitText>{entry.unit}</UnitText>
      </Text>
      <TraceSample quantityKey={quantityKey} />
    </View>
  );
});

/** Key and unit above a panel. */
export const PanelHead = memo(function PanelHead({ quantityKey }: { quantityKey: string }) {
  const entry = quantity(quantityKey);
  return (
    <View style={{ flexDirection: 'row', alignItems: 'baseline', gap: 8, flexShrink: 1 }}>
      <Text variant="label" size={15} nowrap>
        <UnitText>{entry.symbol}</UnitText>
      </Text>
      <Text variant="figure" size={11} soft>
        <UnitText>{entry.unit}</UnitText>
      </Text>
    </View>
  );
});

/** How a quantity is drawn: its colour with its dash, or its points. */
export function TraceSample({ quantityKey }: { quantityKey: string }) {
  const { colour } = useTheme();
  const look = panelLook(quantityKey);
  const stroke = lookColour(look, colour);
  return (
    <svg width={38} height={8} aria-hidden style={{ display: 'block' }}>
      {look.dash === null ? (
        [4, 14, 24, 34].map((x) => <circle key={x} cx={x} cy={4} r={1.8} fill={stroke} />)
      ) : (
        <line
          x1={0}
          x2={38}
          y1={4}
          y2={4}
          stroke={stroke}
          strokeWidth={2}
          strokeDasharray={lookDash(look).join(' ')}
        />
      )}
    </svg>
  );
}
