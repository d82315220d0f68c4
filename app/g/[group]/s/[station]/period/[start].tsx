import { useLocalSearchParams } from 'expo-router';
import { PeriodScreen } from '../../../../../../components/screens/PeriodScreen';

export default function PeriodRoute() {
  const { group, station, start, run } = useLocalSearchParams<{
    group: string;
    station: string;
    start: string;
    run?: string;
  }>();
  return <PeriodScreen group={group} station={station} startMs={Number(start)} run={run} />;
}
