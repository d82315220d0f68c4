import { useLocalSearchParams } from 'expo-router';
import { StationsScreen } from '../../../components/screens/StationsScreen';

export default function Stations() {
  const { group } = useLocalSearchParams<{ group: string }>();
  return <StationsScreen group={group} />;
}
