import { useEffect, useState } from 'react';
import { Pressable, View, useWindowDimensions } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { useQueryClient } from '@tanstack/react-query';
import { useForm } from 'react-hook-form';
import { zodResolver } from '@hookform/resolvers/zod';
import { z } from 'zod';
import { ApiError } from '../data/api-client';
import { signIn } from '../data/auth-client';
import { meKey, useHealth } from '../data/me';
import { roleLabels } from '../../server/contract/roles';
import type { Health } from '../../server/contract/api';
import { Button } from '../primitives/Button';
import { TextField } from '../primitives/Field';
import { LoadingLine } from '../primitives/LoadingLine';
import { Notice } from '../primitives/Notice';
import { Rule } from '../primitives/Rule';
import { Text } from '../primitives/Text';
import { Wordmark } from '../shell/Wordmark';
import { space, useTheme, useWide, webStyle } from '../tokens';
import { WindDay } from './WindDay';

const signInSchema = z.object({
  email: z.email('Write the e-mail address of your account.'),
  password: z.string().min(1, 'Write your password.'),
});
type SignInValues = z.infer<typeof signInSchema>;
type DemoSignIn = NonNullable<Health['demo']>['signIns'][number];

/** Only addresses inside this application: no other site, no protocol-relative address. */
export function safeNext(next: string | undefined): string {
  return next !== undefined && /^\/(?![/\\])/.test(next) && !next.startsWith('/sign-in') ? next : '/';
}

export interface SignInScreenProps {
  /** Where to go afterwards. */
  next?: string;
}

export function SignInScreen({ next }: SignInScreenProps) {
  const { colour } = useTheme();
  const wide = useWide();
  const { width } = useWindowDimensions();
  useEffect(() => {
    document.title = 'Sign in · Gustbook';
  }, []);
  const artWidth = wide ? Math.max(200, Math.min(840, width - 520 - 96)) : Math.max(200, width - 20);
  return (
    <View
      role="main"
      style={[
        { flexDirection: wide ? 'row' : 'column', flexGrow: 1, backgroundColor: colour.panel },
        webStyle({ minHeight: '100dvh' }),
      ]}
    >
      <View
        style={{
          width: wide ? 520 : '100%',
          backgroundColor: colour.bench,
          paddingHorizontal: wide ? 72 : space.xl,
          paddingTop: wide ? 56 : space.xl,
          paddingBottom: 28,
        }}
      >
        <View style={{ marginLeft: -7 }}>
          <Wordmark height={wide ? 44 : 36} />
        </View>
        <View style={{ marginTop: wide ? 72 : 28, gap: space.xl }}>
          <SignInForm next={next} />
        </View>
      </View>
      {wide ? <Rule vertical double /> : <Rule />}
      <View
        style={{
          flex: wide ? 1 : undefined,
          paddingTop: wide ? 48 : 14,
          paddingBottom: space.xl,
          paddingLeft: wide ? 40 : 4,
          paddingRight: wide ? 56 : 16,
          justifyContent: 'space-between',
          gap: space.s,
        }}
      >
        <WindDay width={artWidth} rowHeight={wide ? 31 : 11} />
        <View style={{ marginLeft: 40 }}>
          <Text variant="small" soft>
            One invented day of vertical wind, one line for each hour. Calm night, restless noon.
          </Text>
        </View>
      </View>
    </View>
  );
}

function SignInForm({ next }: SignInScreenProps) {
  const queryClient = useQueryClient();
  const health = useHealth();
  const [isShown, setIsShown] = useState(false);
  const [problem, setProblem] = useState<{ title: string; next: string } | null>(null);
  const form = useForm<SignInValues>({
    resolver: zodResolver(signInSchema),
    defaultValues: { email: '', password: '' },
  });

  const enter = async (values: SignInValues): Promise<void> => {
    setProblem(null);
    try {
      await signIn(values);
    } catch (error) {
      setProblem(problemOf(error instanceof ApiError ? error.status : 0));
      return;
    }
    await queryClient.invalidateQueries({ queryKey: meKey() });
    router.replace(safeNext(next) as Href);
  };

  return (
    <>
      <form noValidate onSubmit={(event) => void form.handleSubmit(enter)(event)}>
        <View style={{ gap: space.l }}>
          <Text variant="title">Open your book</Text>
          {health.data?.status === 'starting' ? (
            <LoadingLine label={health.data.progress ?? 'The server is starting'} />
          ) : null}
          <TextField
            control={form.control}
            name="email"
            label="E-mail"
            type="email"
            autoComplete="username"
          />
          <TextField
            control={form.control}
            name="password"
            label="Password"
            type={isShown ? 'text' : 'password'}
            autoComplete="current-password"
            trailing={
              <Pressable
                role="button"
                aria-label={isShown ? 'Hide the password' : 'Show the password'}
                aria-pressed={isShown}
                onPress={() => setIsShown(!isShown)}
                style={{ minHeight: 44, minWidth: 56, alignItems: 'center', justifyContent: 'center' }}
              >
                <Text
                  variant="small"
                  style={webStyle({ textDecorationLine: 'underline', textUnderlineOffset: '4px' })}
                >
                  {isShown ? 'Hide' : 'Show'}
                </Text>
              </Pressable>
            }
          />
          {problem ? <Notice kind="error" title={problem.title} next={problem.next} /> : null}
          {/* Enter in a field submits through this button; the visible one below is the same action */}
          <button type="submit" className="gb-unseen" tabIndex={-1} aria-hidden="true">
            Sign in
          </button>
          <Button
            kind="primary"
            wide
            label="Sign in"
            busy={form.formState.isSubmitting}
            busyLabel="Signing in"
            onPress={() => void form.handleSubmit(enter)()}
          />
        </View>
      </form>
      {health.data?.demo ? (
        <DemoSignIns
          signIns={health.data.demo.signIns}
          onChoose={enter}
          isBusy={form.formState.isSubmitting}
        />
      ) : null}
    </>
  );
}

function problemOf(status: number): { title: string; next: string } {
  if (status === 0 || status >= 500) {
    return {
      title: 'The server cannot be reached.',
      next: 'Nothing is lost. Check the network and try again.',
    };
  }
  if (status === 429) {
    return { title: 'Too many tries in a short time.', next: 'Wait a minute, then try again.' };
  }
  return {
    title: 'This e-mail address and password do not belong together.',
    next: 'Check both and try again; the lead of your group can help.',
  };
}

interface DemoSignInsProps {
  signIns: readonly DemoSignIn[];
  onChoose: (values: SignInValues) => Promise<void>;
  isBusy: boolean;
}

/** On this machine only: the invented members of the demonstration group. */
function DemoSignIns({ signIns, onChoose, isBusy }: DemoSignInsProps) {
  const { colour } = useTheme();
  const wide = useWide();
  return (
    <View role="region" aria-label="Demonstration" style={{ gap: space.s }}>
      <Text variant="part" level={2}>
        Look around
      </Text>
      <Text variant="small" soft>
        An invented group with invented records, on this machine only.
      </Text>
      <View style={{ borderTopWidth: 1, borderTopColor: colour.hair }}>
        {signIns.map((entry) => (
          <Pressable
            key={entry.email}
            role="button"
            disabled={isBusy}
            onPress={() => void onChoose({ email: entry.email, password: entry.password })}
            style={({ hovered, pressed }: { hovered?: boolean; pressed: boolean }) => ({
              minHeight: wide ? 44 : 48,
              justifyContent: 'center',
              paddingVertical: 6,
              paddingHorizontal: space.s,
              borderBottomWidth: 1,
              borderBottomColor: colour.hair,
              backgroundColor: hovered || pressed ? colour.wash : 'transparent',
            })}
          >
            <Text variant="label" size={14}>
              {`${entry.name}, ${roleLabels[entry.role].label.toLowerCase()}`}
            </Text>
            <Text variant="small" soft>
              {roleLabels[entry.role].purpose}
            </Text>
          </Pressable>
        ))}
      </View>
    </View>
  );
}
