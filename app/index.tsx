import { StartScreen } from '../components/screens/StartScreen';

export default function Start() {
  return <StartScreen />;
}
