import { useLocalSearchParams } from 'expo-router';
import { SeriesScreen } from '../../../../../components/screens/SeriesScreen';

export default function SeriesRoute() {
  const { group, station, run } = useLocalSearchParams<{ group: string; station: string; run?: string }>();
  return <SeriesScreen group={group} station={station} run={run} />;
}
