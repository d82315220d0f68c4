import { Fragment } from 'react';
import type { ReactNode } from 'react';
import { splitUnit } from './unit-pieces';

/**
 * Raised and lowered text. The faces lack superscript minus and subscript two, so exponents are set as
 * spans: "µmol m-2 s-1" → m⁻² s⁻¹ raised, "CO2", "H2O", "CH4", "N2O" lowered.
 */

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
