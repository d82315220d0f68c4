import { useLocalSearchParams } from 'expo-router';
import { SignInScreen } from '../components/screens/SignInScreen';

export default function SignIn() {
  const { next } = useLocalSearchParams<{ next?: string }>();
  return <SignInScreen next={typeof next === 'string' ? next : undefined} />;
}
