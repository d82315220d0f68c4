import { View } from 'react-native';
import type { ReactNode } from 'react';
import { radius, space, useTheme, useWide } from '../tokens';
import { Rule } from './Rule';
import { Text } from './Text';

export interface SectionProps {
  title: string;
  /** A line of soft text under the title. */
  subtitle?: ReactNode;
  /** Beside the title at the right: a small action or a count. */
  aside?: ReactNode;
  children?: ReactNode;
  /** h2 by default. */
  level?: 2 | 3;
  nativeID?: string;
}

/** A part of a page: rule, title, content. */
export function Section({ title, subtitle, aside, children, level = 2, nativeID }: SectionProps) {
  return (
    <View role="region" aria-label={title} nativeID={nativeID} style={{ gap: space.m, alignSelf: 'stretch' }}>
      <Rule faint={level === 3} />
      <View
        style={{
          flexDirection: 'row',
          alignItems: 'flex-start',
          justifyContent: 'space-between',
          gap: space.l,
        }}
      >
        <View style={{ flexShrink: 1, gap: 2 }}>
          <Text variant={level === 2 ? 'section' : 'part'} level={level}>
            {title}
          </Text>
          {subtitle ? (
            <Text variant="small" soft>
              {subtitle}
            </Text>
          ) : null}
        </View>
        {aside}
      </View>
      {children}
    </View>
  );
}

/** A bordered sheet of paper on the bench. No shadow, no round corners. */
export function Panel({
  children,
  flush = false,
  edge,
}: {
  children: ReactNode;
  flush?: boolean;
  edge?: string;
}) {
  const { colour } = useTheme();
  return (
    <View
      style={{
        backgroundColor: colour.panel,
        borderWidth: 1,
        borderColor: colour.rule,
        borderRadius: radius,
        padding: flush ? 0 : space.l,
        gap: space.m,
        alignSelf: 'stretch',
        ...(edge ? { borderTopWidth: 2, borderTopColor: edge } : {}),
      }}
    >
      {children}
    </View>
  );
}

export interface PageHeadProps {
  /** The page's one h1. Lead with the finding where there is one. */
  title: string;
  subtitle?: ReactNode;
  /** Right of the title on wide, below it on a phone. */
  actions?: ReactNode;
}

/** Title band at the top of the work sheet, closed by the double rule. */
export function PageHead({ title, subtitle, actions }: PageHeadProps) {
  const wide = useWide();
  return (
    <View>
      <View
        style={{
          paddingHorizontal: wide ? space.xl : space.l,
          paddingTop: wide ? 20 : space.l,
          paddingBottom: space.l,
          flexDirection: wide ? 'row' : 'column',
          alignItems: wide ? 'center' : 'stretch',
          justifyContent: 'space-between',
          gap: space.m,
        }}
      >
        <View
          style={{
            flexDirection: wide ? 'row' : 'column',
            alignItems: wide ? 'baseline' : 'flex-start',
            columnGap: 20,
            rowGap: 4,
            flexWrap: 'wrap',
            flexShrink: 1,
          }}
        >
          <Text variant="title">{title}</Text>
          {typeof subtitle === 'string' ? <Text soft>{subtitle}</Text> : subtitle}
        </View>
        {actions}
      </View>
      <Rule double />
    </View>
  );
}

/** The padded body of a page below its head. */
export function PageBody({ children, maxWidth }: { children: ReactNode; maxWidth?: number }) {
  const wide = useWide();
  return <View style={{ padding: wide ? space.xl : space.l, gap: space.xl, maxWidth }}>{children}</View>;
}
