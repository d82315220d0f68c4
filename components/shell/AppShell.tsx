import { useEffect, useRef, useState } from 'react';
import { Pressable, View } from 'react-native';
import { Redirect, usePathname } from 'expo-router';
import type { Href } from 'expo-router';
import type { ReactNode } from 'react';
import { isSignedOut } from '../data/api-client';
import { useMe } from '../data/me';
import { useClock } from '../format/useClock';
import { linkProps } from '../primitives/follow-link';
import { Icon } from '../primitives/Icon';
import type { IconName } from '../primitives/Icon';
import { OfflineBanner } from '../primitives/Notice';
import { Rule } from '../primitives/Rule';
import { Sheet } from '../primitives/Sheet';
import { Text } from '../primitives/Text';
import { frame, radius, space, useTheme, useWide, webStyle } from '../tokens';
import { AccountMenu } from './AccountMenu';
import { groupPath, placesOf } from './places';
import type { Place } from './places';
import { cameByHistory } from './came-by-history';
import { useOnline } from './useOnline';
import { Mark, Wordmark } from './Wordmark';

export interface ShellAction {
  key: string;
  /** One or two words. */
  label: string;
  icon: IconName;
  onPress?: () => void;
  href?: string;
  /** Filled; at most one. */
  isPrimary?: boolean;
  isDisabled?: boolean;
  /** The view that is open now. */
  isOn?: boolean;
}

export interface AppShellProps {
  /** Names the page in the browser's tab; the page itself shows the one h1. */
  title: string;
  groupSlug?: string;
  stationSlug?: string;
  stationName?: string;
  /** Station standard time minus UTC [min]; names the zone in the header. */
  stationOffsetMinutes?: number;
  /** Which entry of the index is here. */
  place?: Place;
  /** Phone header, where it should not be station or group: "Hollin Fen, first hour". */
  phoneTitle?: string;
  /** Wide header, right: run, recipe and hash. */
  chip?: ReactNode;
  /** At most four, in the phone's bar after "Places"; wide screens place their own buttons. */
  actions?: readonly ShellAction[];
  /** The spine: full width under the header on wide, directly above the bar on a phone. */
  strip?: ReactNode;
  /** Right column on wide; follows the content on a phone. */
  side?: ReactNode;
  /** px of the side column, 296–424. */
  sideWidth?: number;
  /** What still works without a network; the banner shows only then. */
  offlineText?: string;
  /** A page that needs no sign-in. */
  isGuest?: boolean;
  children?: ReactNode;
}

/** Header, index of places, work sheet; on a phone header, sheet and the action bar at the thumb. */
export function AppShell(props: AppShellProps) {
  const { isGuest = false } = props;
  const { colour } = useTheme();
  const wide = useWide();
  const isOnline = useOnline();
  const pathname = usePathname();
  const me = useMe({ enabled: !isGuest });
  const mainRef = useRef<View>(null);

  // pages scroll with the document: a new page starts at its top, an old one comes back where it was left
  useEffect(() => {
    if (!cameByHistory()) window.scrollTo(0, 0);
  }, []);

  useEffect(() => {
    const parts = [props.title, props.stationName].filter((part) => part !== undefined && part !== '');
    document.title = `${parts.join(' · ')} · Gustbook`;
  }, [props.title, props.stationName]);

  if (!isGuest && isSignedOut(me.error)) {
    return <Redirect href={`/sign-in?next=${encodeURIComponent(pathname)}` as Href} />;
  }

  const group = me.data?.groups.find((candidate) => candidate.slug === props.groupSlug);
  const groupName = group?.name ?? props.groupSlug ?? '';
  const banner = isOnline ? null : (
    <OfflineBanner>
      {props.offlineText ?? 'What is shown was read before; changes wait until the network is back.'}
    </OfflineBanner>
  );
  const focusMain = (): void => (mainRef.current as unknown as HTMLElement | null)?.focus();

  return (
    <View style={[{ flexGrow: 1, backgroundColor: colour.bench }, webStyle({ minHeight: '100dvh' })]}>
      <a
        className="gb-skip"
        href="#main"
        onClick={(event) => {
          event.preventDefault();
          focusMain();
        }}
      >
        Skip to the page
      </a>
      <Header {...props} groupName={groupName} wide={wide} isGuest={isGuest} />
      {wide && props.strip ? (
        <View
          role="region"
          aria-label="Time spine"
          style={{ borderBottomWidth: 1, borderBottomColor: colour.rule }}
        >
          {props.strip}
        </View>
      ) : null}
      <View style={{ flexDirection: 'row', flexGrow: 1 }}>
        {wide ? <Index {...props} /> : null}
        <View
          role="main"
          nativeID="main"
          ref={mainRef}
          tabIndex={-1}
          style={[
            {
              flex: 1,
              minWidth: 0,
              backgroundColor: colour.panel,
              borderLeftWidth: wide ? 1 : 0,
              borderLeftColor: colour.rule,
              paddingBottom: wide ? space.xxxl : 0,
            },
          ]}
        >
          {banner}
          {props.children}
          {!wide && props.side ? (
            <View>
              <Rule />
              <View style={{ padding: space.l, gap: space.l }}>{props.side}</View>
            </View>
          ) : null}
        </View>
        {wide && props.side ? (
          <View
            role="complementary"
            aria-label="Details"
            style={{
              width: props.sideWidth ?? 360,
              backgroundColor: colour.panel,
              borderLeftWidth: 1,
              borderLeftColor: colour.rule,
              padding: space.l,
              paddingHorizontal: 20,
              gap: space.l,
            }}
          >
            {props.side}
          </View>
        ) : null}
      </View>
      {wide ? null : <PhoneFoot {...props} groupName={groupName} />}
    </View>
  );
}

function Header(props: AppShellProps & { groupName: string; wide: boolean; isGuest: boolean }) {
  const { wide, groupName, stationName } = props;
  const { colour } = useTheme();
  const clock = useClock(props.stationOffsetMinutes ?? 0);
  const home = props.groupSlug ? groupPath(props.groupSlug) : '/';
  return (
    <View role="banner" style={{ backgroundColor: colour.bench }}>
      <View
        style={{
          height: frame.header - 5,
          flexDirection: 'row',
          alignItems: 'center',
          gap: wide ? space.xl : space.m,
          paddingHorizontal: wide ? space.xl : space.l,
        }}
      >
        <Pressable
          aria-label="Gustbook, stations"
          {...linkProps(home)}
          style={{ minHeight: wide ? 40 : 47, justifyContent: 'center' }}
        >
          {wide ? <Wordmark height={32} /> : <Mark height={28} />}
        </Pressable>
        {wide ? (
          <View
            role="navigation"
            aria-label="Where you are"
            style={{ flexDirection: 'row', gap: space.s, alignItems: 'baseline' }}
          >
            {stationName === undefined ? (
              <Text soft nowrap>
                {groupName}
              </Text>
            ) : (
              <>
                <Pressable {...linkProps(home)}>
                  <Text soft nowrap>
                    {groupName}
                  </Text>
                </Pressable>
                <Text soft ariaHidden>
                  /
                </Text>
                <Text variant="label" size={15} nowrap>
                  {stationName}
                </Text>
              </>
            )}
          </View>
        ) : (
          <View style={{ flexShrink: 1, minWidth: 0 }}>
            <Text variant="label" size={15} numberOfLines={1}>
              {props.phoneTitle ?? stationName ?? groupName}
            </Text>
          </View>
        )}
        <View style={{ flex: 1 }} />
        {wide && props.chip ? (
          typeof props.chip === 'string' ? (
            <Text variant="small" soft nowrap>
              {props.chip}
            </Text>
          ) : (
            props.chip
          )
        ) : null}
        {wide && props.stationOffsetMinutes !== undefined ? (
          <Text variant="small" soft nowrap>
            {clock.label}
          </Text>
        ) : null}
        <AccountMenu groupSlug={props.groupSlug} isGuest={props.isGuest} />
      </View>
      <Rule double />
    </View>
  );
}

function Index({ groupSlug, stationSlug, place }: AppShellProps) {
  const { colour } = useTheme();
  const places = groupSlug ? placesOf(groupSlug, stationSlug) : [];
  return (
    <View
      role="navigation"
      aria-label="Places"
      style={[
        { width: frame.index, paddingTop: space.xl, alignSelf: 'flex-start' },
        webStyle({ position: 'sticky', top: 0 }),
      ]}
    >
      {places.map((link) => {
        const isHere = link.place === place;
        return (
          <Pressable
            key={link.place}
            {...linkProps(link.href)}
            aria-current={isHere ? 'page' : undefined}
            style={({ hovered }: { hovered?: boolean; pressed: boolean }) => ({
              height: 44,
              justifyContent: 'center',
              paddingLeft: space.xl - 1,
              borderWidth: 1,
              borderRightWidth: 0,
              borderColor: isHere ? colour.rule : 'transparent',
              backgroundColor: isHere ? colour.panel : hovered ? colour.wash : 'transparent',
              marginRight: isHere ? -1 : 0,
              zIndex: isHere ? 1 : 0,
            })}
          >
            {isHere ? (
              <View
                style={{
                  position: 'absolute',
                  left: 12,
                  top: 13,
                  bottom: 13,
                  width: 3,
                  backgroundColor: colour.ink,
                }}
              />
            ) : null}
            <Text variant="label" soft={!isHere} nowrap>
              {link.label}
            </Text>
          </Pressable>
        );
      })}
    </View>
  );
}

function PhoneFoot(props: AppShellProps & { groupName: string }) {
  const { colour } = useTheme();
  const [isOpen, setIsOpen] = useState(false);
  const places = props.groupSlug ? placesOf(props.groupSlug, props.stationSlug) : [];
  const actions = (props.actions ?? []).slice(0, 4);
  return (
    <View style={[{ backgroundColor: colour.panel }, webStyle({ position: 'sticky', bottom: 0, zIndex: 5 })]}>
      {props.strip ? (
        <View
          role="region"
          aria-label="Time spine"
          style={{ backgroundColor: colour.bench, borderTopWidth: 1, borderTopColor: colour.rule }}
        >
          {props.strip}
        </View>
      ) : null}
      <View
        role="navigation"
        aria-label="Actions"
        style={[
          {
            minHeight: frame.actionBar,
            flexDirection: 'row',
            paddingHorizontal: space.xs,
            borderTopWidth: 1,
            borderTopColor: colour.rule,
          },
          webStyle({ paddingBottom: 'env(safe-area-inset-bottom)' }),
        ]}
      >
        <BarButton
          action={{ key: 'places', label: 'Places', icon: 'places', onPress: () => setIsOpen(true) }}
          hasPopup
        />
        {actions.map((action) => (
          <BarButton key={action.key} action={action} />
        ))}
      </View>
      <Sheet
        open={isOpen}
        onClose={() => setIsOpen(false)}
        title="Places"
        subtitle={props.stationName ? `${props.groupName} / ${props.stationName}` : props.groupName}
      >
        <View
          role="navigation"
          aria-label="Places"
          style={{ marginHorizontal: -space.l, marginVertical: -space.l }}
        >
          {places.map((link) => {
            const isHere = link.place === props.place;
            const follow = linkProps(link.href);
            return (
              <Pressable
                key={link.place}
                {...follow}
                onPress={(event) => {
                  setIsOpen(false);
                  follow.onPress(event);
                }}
                aria-current={isHere ? 'page' : undefined}
                style={{
                  minHeight: 56,
                  flexDirection: 'row',
                  alignItems: 'center',
                  paddingHorizontal: space.l,
                  borderBottomWidth: 1,
                  borderBottomColor: colour.hair,
                }}
              >
                <View
                  style={{
                    width: 3,
                    height: 20,
                    marginRight: space.m,
                    backgroundColor: isHere ? colour.ink : 'transparent',
                  }}
                />
                <Text variant="label" size={15}>
                  {link.label}
                </Text>
              </Pressable>
            );
          })}
        </View>
      </Sheet>
    </View>
  );
}

function BarButton({ action, hasPopup = false }: { action: ShellAction; hasPopup?: boolean }) {
  const { colour } = useTheme();
  const ink = action.isPrimary ? colour.panel : action.isOn ? colour.ink : colour.inkSoft;
  return (
    <Pressable
      role={action.href ? undefined : 'button'}
      aria-haspopup={hasPopup ? 'dialog' : undefined}
      aria-disabled={action.isDisabled || undefined}
      disabled={action.isDisabled}
      {...(action.href && !action.isDisabled ? linkProps(action.href) : { onPress: action.onPress })}
      style={[
        {
          flex: 1,
          flexBasis: 0,
          minWidth: 0,
          minHeight: 48,
          alignItems: 'center',
          justifyContent: 'center',
          gap: 5,
          borderRadius: radius,
          opacity: action.isDisabled ? 0.45 : 1,
        },
        action.isPrimary && { backgroundColor: colour.ink, marginVertical: 8, marginHorizontal: 4 },
      ]}
    >
      {action.isOn ? (
        <View
          style={{
            position: 'absolute',
            top: 0,
            left: '18%',
            right: '18%',
            height: 3,
            backgroundColor: colour.ink,
          }}
        />
      ) : null}
      <Icon name={action.icon} size={24} colour={ink} />
      <Text variant="label" size={12} colour={ink} nowrap>
        {action.label}
      </Text>
    </Pressable>
  );
}
