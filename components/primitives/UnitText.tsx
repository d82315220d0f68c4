import { Fragment } from 'react';
import type { ReactNode } from 'react';

/**
 * Raised and lowered text. The faces lack superscript minus and subscript two, so exponents are set as
 * spans: "µmol m-2 s-1" → m⁻² s⁻¹ raised, "CO2", "H2O", "CH4", "N2O" lowered.
 */

interface UnitPiece {
  text: string;
  place: 'line' | 'raised' | 'lowered';
}

/** Splits a unit or a sentence into pieces on the line, raised or lowered. */
export function splitUnit(text: string): UnitPiece[] {
  const pieces: UnitPiece[] = [];
  const push = (piece: UnitPiece): void => {
    if (piece.text !== '') pieces.push(piece);
  };
  const pattern =
    /\b(CO|H|CH|N|O|NH|SF)(\d)(O?)(?![\d.])|([A-Za-zµ°Ω)])([-−⁻]\d+)(?=$|[\s.,;:)/])|\bm([23])(?=$|[\s.,;:)/])/gu;
  let cursor = 0;
  for (const match of text.matchAll(pattern)) {
    const [whole, element, count, tail, base, exponent, power] = match;
    push({ text: text.slice(cursor, match.index), place: 'line' });
    if (element !== undefined) {
      push({ text: element, place: 'line' });
      push({ text: count ?? '', place: 'lowered' });
      push({ text: tail ?? '', place: 'line' });
    } else if (base !== undefined) {
      push({ text: base, place: 'line' });
      push({ text: (exponent ?? '').replace(/[-⁻]/u, '−'), place: 'raised' });
    } else {
      push({ text: 'm', place: 'line' });
      push({ text: power ?? '', place: 'raised' });
    }
    cursor = match.index + whole.length;
  }
  push({ text: text.slice(cursor), place: 'line' });
  return pieces;
}

const pieceStyle = { fontSize: '0.74em', lineHeight: 0 } as const;

/** Put it inside a Text: <Text variant="small" soft><UnitText>µmol m-2 s-1</UnitText></Text>. */
export function UnitText({ children }: { children: string }): ReactNode {
  return (
    <>
      {splitUnit(children).map((piece, index) => {
        if (piece.place === 'raised')
          return (
            <sup key={index} style={pieceStyle}>
              {piece.text}
            </sup>
          );
        if (piece.place === 'lowered')
          return (
            <sub key={index} style={pieceStyle}>
              {piece.text}
            </sub>
          );
        return <Fragment key={index}>{piece.text}</Fragment>;
      })}
    </>
  );
}

export function Superscript({ children }: { children: ReactNode }) {
  return <sup style={pieceStyle}>{children}</sup>;
}

export function Subscript({ children }: { children: ReactNode }) {
  return <sub style={pieceStyle}>{children}</sub>;
}
