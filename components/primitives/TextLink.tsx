import { Text as NativeText } from 'react-native';
import { face, useTheme, useWide, webStyle } from '../tokens';
import { linkProps } from './follow-link';

export interface TextLinkProps {
  label: string;
  href: string;
  /** A link that stands alone (label face, 48 px tall on phones) instead of inside a sentence. */
  standing?: boolean;
  ariaLabel?: string;
  size?: number;
}

export function TextLink({ label, href, standing = false, ariaLabel, size }: TextLinkProps) {
  const { colour } = useTheme();
  const wide = useWide();
  return (
    <NativeText
      {...linkProps(href)}
      aria-label={ariaLabel}
      style={[
        { color: colour.ink },
        webStyle({
          fontFamily: standing ? face.label : face.text,
          fontSize: size ?? (standing ? 14 : 'inherit'),
          textDecorationLine: 'underline',
          textUnderlineOffset: '4px',
        }),
        standing &&
          webStyle({
            fontWeight: 600,
            display: 'inline-flex',
            alignItems: 'center',
            minHeight: wide ? 32 : 48,
          }),
      ]}
    >
      {label}
    </NativeText>
  );
}
