import { NotFoundScreen } from '../components/screens/NotFoundScreen';

export default function NotFound() {
  return <NotFoundScreen />;
}
