import { Slot } from 'expo-router';
import { AppProviders } from '../components/shell/AppProviders';

export { CrashScreen as ErrorBoundary } from '../components/screens/CrashScreen';

export default function RootLayout() {
  return (
    <AppProviders>
      <Slot />
    </AppProviders>
  );
}
