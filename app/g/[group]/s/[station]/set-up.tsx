import { useLocalSearchParams } from 'expo-router';
import { SetUpScreen } from '../../../../../components/screens/SetUpScreen';

export default function SetUp() {
  const { group, station } = useLocalSearchParams<{ group: string; station: string }>();
  return <SetUpScreen group={group} station={station} />;
}
