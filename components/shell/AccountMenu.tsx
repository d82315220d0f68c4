import { useContext, useState } from 'react';
import { Pressable, View } from 'react-native';
import { router } from 'expo-router';
import { useQueryClient } from '@tanstack/react-query';
import { signOut } from '../data/auth-client';
import { useMe } from '../data/me';
import { ClockContext } from '../format/useClock';
import { Button } from '../primitives/Button';
import { ErrorNotice } from '../primitives/Notice';
import { SegmentChoice } from '../primitives/Field';
import { Sheet } from '../primitives/Sheet';
import { Text } from '../primitives/Text';
import { TextLink } from '../primitives/TextLink';
import { roleLabels } from '../../server/contract/roles';
import { space, useTheme, useWide, webStyle } from '../tokens';
import { groupPath } from './places';
import { useThemeSwitch } from './ThemeProvider';

function initialsOf(name: string): string {
  const words = name.split(/[\s.]+/).filter((word) => word !== '');
  return ((words[0]?.[0] ?? '?') + (words.length > 1 ? (words.at(-1)?.[0] ?? '') : '')).toUpperCase();
}

export interface AccountMenuProps {
  groupSlug?: string;
  /** A page that needs no sign-in: only what the reader can choose on this device. */
  isGuest?: boolean;
}

/** Who is signed in, groups, light and dark, station time and UTC, sign-out. */
export function AccountMenu({ groupSlug, isGuest = false }: AccountMenuProps) {
  const { colour } = useTheme();
  const wide = useWide();
  const me = useMe({ enabled: !isGuest });
  const queryClient = useQueryClient();
  const themeSwitch = useThemeSwitch();
  const clock = useContext(ClockContext);
  const [isOpen, setIsOpen] = useState(false);
  const [isLeaving, setIsLeaving] = useState(false);
  const [error, setError] = useState<unknown>(null);

  const user = me.data?.user;
  const role = me.data?.groups.find((group) => group.slug === groupSlug)?.role;
  const otherGroups = me.data?.groups.filter((group) => group.slug !== groupSlug) ?? [];

  const leave = async (): Promise<void> => {
    setIsLeaving(true);
    setError(null);
    try {
      await signOut();
    } catch (cause) {
      setError(cause);
      return;
    } finally {
      setIsLeaving(false);
    }
    queryClient.clear();
    router.replace('/sign-in');
  };

  return (
    <>
      <Pressable
        role="button"
        aria-haspopup="dialog"
        aria-label={user ? `${initialsOf(user.name)}, account of ${user.name}` : '?, account and display'}
        onPress={() => setIsOpen(true)}
        style={[
          {
            minWidth: wide ? 40 : 48,
            minHeight: wide ? 40 : 48,
            alignItems: 'center',
            justifyContent: 'center',
          },
          !wide && { marginRight: -8 },
          webStyle({ cursor: 'pointer' }),
        ]}
      >
        <View
          style={{
            width: 32,
            height: 32,
            borderRadius: 16,
            borderWidth: 1,
            borderColor: colour.rule,
            alignItems: 'center',
            justifyContent: 'center',
          }}
        >
          <Text variant="label" size={12} ariaHidden>
            {user ? initialsOf(user.name) : '?'}
          </Text>
        </View>
      </Pressable>
      <Sheet
        open={isOpen}
        onClose={() => setIsOpen(false)}
        title={user ? user.name : 'Account and display'}
        subtitle={
          user ? `${user.email}${role ? `, ${roleLabels[role].label.toLowerCase()}` : ''}` : undefined
        }
        width={420}
        actions={
          isGuest ? undefined : (
            <Button label="Sign out" onPress={() => void leave()} busy={isLeaving} busyLabel="Signing out" />
          )
        }
      >
        {error ? (
          <ErrorNotice
            error={error}
            fallback="You are still signed in: the server did not answer. Try again."
          />
        ) : null}
        <SegmentChoice
          label="Colours"
          value={themeSwitch.choice}
          onChange={themeSwitch.setChoice}
          options={[
            { value: 'device', label: 'as the device' },
            { value: 'light', label: 'light' },
            { value: 'dark', label: 'dark' },
          ]}
        />
        <SegmentChoice
          label="Times"
          value={clock.mode}
          onChange={clock.setMode}
          options={[
            { value: 'station', label: 'station time' },
            { value: 'utc', label: 'UTC' },
          ]}
          help="Station time is a fixed offset from UTC, without daylight saving."
        />
        {otherGroups.length > 0 ? (
          <View style={{ gap: space.xs }}>
            <Text variant="label">Other groups</Text>
            {otherGroups.map((group) => (
              <TextLink key={group.slug} label={group.name} href={groupPath(group.slug)} standing />
            ))}
          </View>
        ) : null}
      </Sheet>
    </>
  );
}
