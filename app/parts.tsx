import { PartsScreen } from '../components/screens/PartsScreen';

export default function Parts() {
  return <PartsScreen />;
}
