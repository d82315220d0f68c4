import { Link } from 'expo-router';
import type { Href } from 'expo-router';
import { face, useTheme, useWide, webStyle } from '../tokens';

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
    <Link
      href={href as Href}
      aria-label={ariaLabel}
      style={[
        { color: colour.ink, fontSize: size ?? (standing ? 14 : undefined) },
        standing
          ? webStyle({
              fontFamily: face.label,
              fontWeight: 600,
              display: 'inline-flex',
              alignItems: 'center',
              minHeight: wide ? 32 : 48,
            })
          : webStyle({ fontFamily: face.text }),
        webStyle({ textDecorationLine: 'underline', textUnderlineOffset: '4px' }),
      ]}
    >
      {label}
    </Link>
  );
}
