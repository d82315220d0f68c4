export interface UnitPiece {
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
    /\b(F?(?:CO|CH|NH|SF|H|N|O))([2-6])(O?)(?![\d.])|([A-Za-zµ°Ω)])([-−⁻]\d+)(?=$|[\s.,;:)/])|\bm([23])(?=$|[\s.,;:)/])/gu;
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
