import { Redirect } from 'expo-router';
import type { Href } from 'expo-router';
import { isSignedOut } from '../data/api-client';
import { useMe } from '../data/me';
import { AppShell } from '../shell/AppShell';
import { groupPath } from '../shell/places';
import { EmptyState } from '../primitives/EmptyState';
import { LoadingLine } from '../primitives/LoadingLine';
import { ErrorNotice } from '../primitives/Notice';
import { PageBody, PageHead } from '../primitives/Section';

/** Leads to the reader's first group, or to sign-in. */
export function StartScreen() {
  const me = useMe();
  if (isSignedOut(me.error)) return <Redirect href={'/sign-in' as Href} />;
  const first = me.data?.groups[0];
  if (first) return <Redirect href={groupPath(first.slug) as Href} />;
  return (
    <AppShell title="Gustbook" isGuest={!me.data}>
      <PageHead title="Gustbook" />
      <PageBody maxWidth={640}>
        {me.isPending ? <LoadingLine label="Opening your book" /> : null}
        {me.isError ? <ErrorNotice error={me.error} onRetry={() => void me.refetch()} /> : null}
        {me.data ? (
          <EmptyState title="You are not a member of any group yet.">
            Ask the lead of your group to invite you with the e-mail address that you signed in with.
          </EmptyState>
        ) : null}
      </PageBody>
    </AppShell>
  );
}
