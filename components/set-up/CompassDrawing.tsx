import { View } from 'react-native';
import Svg, { Circle, Defs, G, Line, Path, Pattern, Text as SvgText } from 'react-native-svg';
import { trueBoomAzimuthDeg } from '../../processing/schemas/set-up';
import type { SetUp } from '../../processing/schemas/set-up';
import { formatNumber } from '../format/numbers';
import { Text } from '../primitives';
import { face, space, useTheme } from '../tokens';

export type CompassGeometry = Pick<
  SetUp,
  | 'boomAzimuthDeg'
  | 'azimuthReference'
  | 'magneticDeclinationDeg'
  | 'separation'
  | 'mastSectorHalfWidthDeg'
  | 'disturbedSectors'
>;

const size = 288;
const centre = size / 2;
const rim = 112;

/** A point at a distance in a direction, clockwise from north. */
function at(azimuthDeg: number, distance: number): [number, number] {
  const radians = (azimuthDeg * Math.PI) / 180;
  return [centre + distance * Math.sin(radians), centre - distance * Math.cos(radians)];
}

function wedge(fromDeg: number, toDeg: number, inner: number, outer: number): string {
  const span = (((toDeg - fromDeg) % 360) + 360) % 360 || 360;
  const end = fromDeg + Math.min(span, 359.9);
  const large = span > 180 ? 1 : 0;
  const [ax, ay] = at(fromDeg, outer);
  const [bx, by] = at(end, outer);
  const [cx, cy] = at(end, inner);
  const [dx, dy] = at(fromDeg, inner);
  return `M${ax} ${ay}A${outer} ${outer} 0 ${large} 1 ${bx} ${by}L${cx} ${cy}A${inner} ${inner} 0 ${large} 0 ${dx} ${dy}Z`;
}

const turn = (azimuthDeg: number): number => ((azimuthDeg % 360) + 360) % 360;

/** Mast, boom and sectors seen from above, true north up. Sectors are where the wind comes from. */
export function CompassDrawing({ geometry }: { geometry: CompassGeometry }) {
  const { colour } = useTheme();
  const isKnown = Number.isFinite(geometry.boomAzimuthDeg) && geometry.boomAzimuthDeg !== null;
  const boom = isKnown ? trueBoomAzimuthDeg(geometry) : 0;
  const half = Number.isFinite(geometry.mastSectorHalfWidthDeg) ? geometry.mastSectorHalfWidthDeg : 0;
  const mastFrom = turn(boom + 180 - half);
  const mastTo = turn(boom + 180 + half);
  const [sonicX, sonicY] = at(boom, 62);
  const { northM, eastM } = geometry.separation;
  const distanceM = Math.hypot(northM, eastM);
  // not to scale: the analyser stands in its direction, far enough to be seen
  const hasAnalyser = Number.isFinite(distanceM) && distanceM > 0.005;
  const reach = 26 / (distanceM || 1);
  const [analyserX, analyserY] = [sonicX + eastM * reach, sonicY - northM * reach];
  const whole = (value: number): string => formatNumber(value, 0);
  const words = isKnown
    ? [
        `Seen from above, true north up. The boom points to ${whole(boom)} degrees.`,
        half > 0
          ? `Wind from ${whole(mastFrom)} to ${whole(mastTo)} degrees passes the mast first.`
          : 'No sector behind the mast is set.',
        ...geometry.disturbedSectors.map(
          (sector) => `Disturbed from ${sector.fromDeg} to ${sector.toDeg} degrees: ${sector.reason}.`,
        ),
      ].join(' ')
    : 'The boom’s direction is not written yet.';
  const label = (x: number, y: number, text: string, soft = false) => (
    <SvgText
      x={x}
      y={y}
      textAnchor="middle"
      fontFamily={face.label}
      fontWeight="600"
      fontSize={12}
      fill={soft ? colour.inkSoft : colour.ink}
      stroke={colour.panel}
      strokeWidth={3}
      {...({ paintOrder: 'stroke' } as object)}
    >
      {text}
    </SvgText>
  );
  const [mastLabelX, mastLabelY] = at(boom + 180, 84);
  return (
    <View style={{ gap: space.s, maxWidth: size }}>
      <View role="img" aria-label={words}>
        <Svg width="100%" height={size} viewBox={`0 0 ${size} ${size}`} aria-hidden>
          <Defs>
            <Pattern
              id="mast-hatch"
              width={6}
              height={6}
              patternUnits="userSpaceOnUse"
              patternTransform="rotate(45)"
            >
              <Path d="M0 0V6" stroke={colour.rule} strokeWidth={1.2} />
            </Pattern>
            <Pattern
              id="sector-hatch"
              width={5}
              height={5}
              patternUnits="userSpaceOnUse"
              patternTransform="rotate(-45)"
            >
              <Path d="M0 0V5" stroke={colour.rejected} strokeWidth={1.2} />
            </Pattern>
            <Pattern
              id="sector-hatch-usable"
              width={5}
              height={5}
              patternUnits="userSpaceOnUse"
              patternTransform="rotate(-45)"
            >
              <Path d="M0 0V5" stroke={colour.usable} strokeWidth={1.2} />
            </Pattern>
          </Defs>
          <Circle cx={centre} cy={centre} r={rim} fill="none" stroke={colour.rule} />
          {Array.from({ length: 36 }, (_, index) => {
            const [x1, y1] = at(index * 10, rim);
            const [x2, y2] = at(index * 10, rim - (index % 9 === 0 ? 9 : 4));
            return <Line key={index} x1={x1} y1={y1} x2={x2} y2={y2} stroke={colour.rule} />;
          })}
          {isKnown && half > 0 ? (
            <Path
              d={wedge(mastFrom, mastTo, 16, rim)}
              fill="url(#mast-hatch)"
              stroke={colour.rule}
              strokeDasharray="4 3"
            />
          ) : null}
          {geometry.disturbedSectors.map((sector, index) =>
            Number.isFinite(sector.fromDeg) && Number.isFinite(sector.toDeg) ? (
              <Path
                key={index}
                d={wedge(sector.fromDeg, sector.toDeg, rim - 26, rim)}
                fill={sector.grade === 2 ? 'url(#sector-hatch)' : 'url(#sector-hatch-usable)'}
                stroke={sector.grade === 2 ? colour.rejected : colour.usable}
              />
            ) : null,
          )}
          {(['N', 'E', 'S', 'W'] as const).map((name, index) => {
            const [x, y] = at(index * 90, rim + 14);
            return <G key={name}>{label(x, y + 4, name)}</G>;
          })}
          <Path
            d={`M${centre} ${centre - 9}L${centre + 8} ${centre + 6}L${centre - 8} ${centre + 6}Z`}
            fill={colour.panel}
            stroke={colour.ink}
            strokeWidth={1.6}
          />
          {isKnown ? (
            <>
              <Line x1={centre} y1={centre} x2={sonicX} y2={sonicY} stroke={colour.ink} strokeWidth={3} />
              <Circle cx={sonicX} cy={sonicY} r={6} fill={colour.panel} stroke={colour.ink} strokeWidth={2} />
              {hasAnalyser ? (
                <>
                  <Line
                    x1={sonicX}
                    y1={sonicY}
                    x2={analyserX}
                    y2={analyserY}
                    stroke={colour.inkSoft}
                    strokeDasharray="3 3"
                  />
                  <Circle cx={analyserX} cy={analyserY} r={5} fill={colour.ink} />
                </>
              ) : null}
              {half > 0 ? label(mastLabelX, mastLabelY + 4, 'behind the mast', true) : null}
            </>
          ) : null}
        </Svg>
      </View>
      <Text variant="small" soft>
        {isKnown
          ? `Seen from above, not to scale: boom to ${whole(boom)}° true, open circle the sonic${hasAnalyser ? ', filled the analyser' : ''}. Hatched: directions the wind comes from that disturb it.`
          : 'The drawing appears when the boom’s direction is written.'}
      </Text>
    </View>
  );
}
