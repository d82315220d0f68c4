import { useLocalSearchParams } from 'expo-router';
import { RecipesScreen } from '../../../components/screens/RecipesScreen';

export default function Recipes() {
  const { group, hash } = useLocalSearchParams<{ group: string; hash?: string }>();
  return <RecipesScreen group={group} hash={hash} />;
}
