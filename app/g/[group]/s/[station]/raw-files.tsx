import { useLocalSearchParams } from 'expo-router';
import { RawFilesScreen } from '../../../../../components/screens/RawFilesScreen';

export default function RawFiles() {
  const { group, station } = useLocalSearchParams<{ group: string; station: string }>();
  return <RawFilesScreen group={group} station={station} />;
}
