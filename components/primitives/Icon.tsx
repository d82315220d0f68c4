import Svg, { Circle, Path } from 'react-native-svg';
import { useTheme } from '../tokens';

/** The few icons of the frame, drawn on a 24 grid with a 1.8 stroke; always beside a word or a name. */
export type IconName =
  | 'places'
  | 'evidence'
  | 'note'
  | 'again'
  | 'close'
  | 'back'
  | 'forward'
  | 'plus'
  | 'minus'
  | 'reset'
  | 'check'
  | 'bringIn'
  | 'photo'
  | 'sign'
  | 'offline'
  | 'arrow'
  | 'copy'
  | 'down'
  | 'up'
  | 'export'
  | 'seal';

const paths: Record<IconName, readonly string[]> = {
  places: ['M5 21V5M5 8h14M5 14h9M5 20h14'],
  evidence: ['M6 3v18', 'M12 6h9M12 13h9M12 20h6'],
  note: ['M5 4h14v11l-5 5H5zM14 20v-5h5'],
  again: ['M19 5v5h-5M18.5 10a7.5 7.5 0 1 0 .8 5'],
  close: ['M6 6l12 12M18 6L6 18'],
  back: ['M15 5l-7 7 7 7'],
  forward: ['M9 5l7 7-7 7'],
  plus: ['M12 5v14M5 12h14'],
  minus: ['M5 12h14'],
  reset: ['M5 5v5h5M5.5 10a7.5 7.5 0 1 1-.8 5'],
  check: ['M4 13l5 5L20 6'],
  bringIn: ['M12 3v13M7 11l5 5 5-5M4 21h16'],
  photo: ['M4 8h4l2-3h4l2 3h4v11H4z', 'M12 10a3.4 3.4 0 1 0 .01 0'],
  sign: ['M4 20h16M5 15c2-6 4-10 5-9s-2 8 0 8 3-6 4-5-1 4 1 4 2-2 4-2'],
  offline: ['M3 9c5-5 13-5 18 0M6.5 12.5c3-3 8-3 11 0M10 16c1.2-1 2.8-1 4 0M12 19v.5M4 20L20 4'],
  arrow: ['M3 12h17M14 6l6 6-6 6'],
  copy: ['M9 9h11v11H9zM5 15H4V4h11v1'],
  down: ['M5 9l7 7 7-7'],
  up: ['M5 15l7-7 7 7'],
  export: ['M12 16V3M7 8l5-5 5 5M4 21h16'],
  seal: ['M4 6v12h16V6', 'M8 12h8'],
};

export interface IconProps {
  name: IconName;
  size?: number;
  colour?: string;
}

/** Decoration for a control that has words or an aria-label; itself unspoken. */
export function Icon({ name, size = 20, colour }: IconProps) {
  const theme = useTheme();
  const stroke = colour ?? theme.colour.ink;
  return (
    <Svg width={size} height={size} viewBox="0 0 24 24" fill="none" aria-hidden>
      {paths[name].map((d) => (
        <Path key={d} d={d} stroke={stroke} strokeWidth={1.8} fill="none" />
      ))}
      {name === 'evidence' ? <Circle cx={6} cy={6} r={2.4} stroke={stroke} strokeWidth={1.8} /> : null}
      {name === 'evidence' ? <Circle cx={6} cy={13} r={2.4} stroke={stroke} strokeWidth={1.8} /> : null}
    </Svg>
  );
}
