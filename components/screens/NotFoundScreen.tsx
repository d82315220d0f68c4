import { AppShell } from '../shell/AppShell';
import { Button } from '../primitives/Button';
import { PageBody, PageHead } from '../primitives/Section';
import { Text } from '../primitives/Text';

export function NotFoundScreen() {
  return (
    <AppShell title="Not here" isGuest>
      <PageHead title="There is no such page" />
      <PageBody maxWidth={640}>
        <Text>
          The address may be mistyped, or what it led to was withdrawn, or it belongs to a group that you are
          not a member of. Nothing was changed.
        </Text>
        <Button label="Go to the stations" href="/" kind="primary" />
      </PageBody>
    </AppShell>
  );
}
