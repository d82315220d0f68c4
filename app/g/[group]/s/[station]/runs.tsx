import { useLocalSearchParams } from 'expo-router';
import { RunsScreen } from '../../../../../components/screens/RunsScreen';

export default function Runs() {
  const { group, station } = useLocalSearchParams<{ group: string; station: string }>();
  return <RunsScreen group={group} station={station} />;
}
