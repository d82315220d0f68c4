import { View } from 'react-native';
import { Sheet, Text } from '../primitives';
import { space } from '../tokens';

export interface ExportSheetProps {
  open: boolean;
  onClose: () => void;
  group: string;
  runId: string;
  runNumber: number;
  /** Words of the span that is exported. */
  spanWords: string;
  fromMs: number;
  toMs: number;
}

/** The two files a run can leave as, with what each is for. */
export function ExportSheet(props: ExportSheetProps) {
  const address = (format: string) =>
    `/api/groups/${props.group}/runs/${props.runId}/export?format=${format}&fromMs=${props.fromMs}&toMs=${props.toMs}`;
  return (
    <Sheet
      open={props.open}
      onClose={props.onClose}
      title="Export"
      subtitle={`Run ${props.runNumber}, ${props.spanWords}`}
    >
      <View style={{ gap: space.l }}>
        <View style={{ gap: space.xs }}>
          <Text strong>For a flux network</Text>
          <Text variant="small" soft>
            Exchange names, local standard time, -9999 where a value is missing, downward momentum negative.
            Not filtered by u*, not gap-filled.
          </Text>
          <a href={address('exchange')} download>
            <Text variant="label" style={{ textDecorationLine: 'underline' }}>
              Save exchange CSV
            </Text>
          </a>
        </View>
        <View style={{ gap: space.xs }}>
          <Text strong>For your own work</Text>
          <Text variant="small" soft>
            Every quantity with a row of units, grades and reasons in words, times in UTC and station time,
            full precision.
          </Text>
          <a href={address('plain')} download>
            <Text variant="label" style={{ textDecorationLine: 'underline' }}>
              Save plain CSV
            </Text>
          </a>
        </View>
      </View>
    </Sheet>
  );
}
