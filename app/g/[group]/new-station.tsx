import { useLocalSearchParams } from 'expo-router';
import { NewStationScreen } from '../../../components/screens/NewStationScreen';

export default function NewStation() {
  const { group } = useLocalSearchParams<{ group: string }>();
  return <NewStationScreen group={group} />;
}
