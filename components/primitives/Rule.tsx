import { View } from 'react-native';
import { useTheme } from '../tokens';

export interface RuleProps {
  /** 1 px rule, 3 px gap, 1 px hair: under headers and at a drawer's edge. */
  double?: boolean;
  /** Hair instead of rule. */
  faint?: boolean;
  vertical?: boolean;
}

export function Rule({ double = false, faint = false, vertical = false }: RuleProps) {
  const { colour } = useTheme();
  const strong = faint ? colour.hair : colour.rule;
  return (
    <View
      aria-hidden
      style={
        vertical
          ? {
              width: double ? 5 : 1,
              alignSelf: 'stretch',
              borderLeftWidth: 1,
              borderLeftColor: strong,
              borderRightWidth: double ? 1 : 0,
              borderRightColor: colour.hair,
            }
          : {
              height: double ? 5 : 1,
              alignSelf: 'stretch',
              borderTopWidth: 1,
              borderTopColor: strong,
              borderBottomWidth: double ? 1 : 0,
              borderBottomColor: colour.hair,
            }
      }
    />
  );
}
