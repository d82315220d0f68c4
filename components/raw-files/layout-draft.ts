import type { ChannelKey, Layout, LayoutColumn } from '../../processing/schemas/layout';
import { channelUnits, layoutSchema, statusChannels } from '../../processing/schemas/layout';
import { contentHash } from '../../processing/canonical';
import { channelWords, isOrdinaryForUnit } from '../../processing/records/guess-layout';
import type { GuessedField, LayoutGuess, LayoutProblem } from '../../processing/records/guess-layout';
import type { Preview } from '../../processing/records/preview';
import { formatNumber } from '../format/numbers';

/** A layout while a person looks at it: what they changed, and what is still open. */

export interface LayoutDraft {
  layout: Layout;
  /** What the first lines spoke for; null when a saved layout was taken. */
  guess: LayoutGuess | null;
  /** Saved layout that the draft began from. */
  savedId: string | null;
  touched: readonly (GuessedField | ChannelKey)[];
}

export function draftOfGuess(guess: LayoutGuess): LayoutDraft {
  return { layout: guess.layout, guess, savedId: null, touched: [] };
}

export function draftOfSaved(saved: { id: string; layout: Layout }): LayoutDraft {
  return { layout: saved.layout, guess: null, savedId: saved.id, touched: [] };
}

const touch = (draft: LayoutDraft, what: GuessedField | ChannelKey): LayoutDraft['touched'] =>
  draft.touched.includes(what) ? draft.touched : [...draft.touched, what];

export function changeField<Field extends GuessedField>(
  draft: LayoutDraft,
  field: Field,
  value: Layout[Field],
): LayoutDraft {
  return { ...draft, layout: { ...draft.layout, [field]: value }, touched: touch(draft, field) };
}

/** Gives a quantity another column; null: it is not recorded. */
export function changeColumn(
  draft: LayoutDraft,
  channel: ChannelKey,
  index: number | null,
  name: string | null,
): LayoutDraft {
  const others = draft.layout.columns.filter((column) => column.channel !== channel);
  const before = draft.layout.columns.find((column) => column.channel === channel);
  const columns =
    index === null
      ? others
      : [
          // a column that another quantity held goes over to this one
          ...others.filter((column) => column.index !== index),
          { ...(before ?? newColumn(channel)), index, name, knownBy: 'person' as const },
        ].sort((a, b) => a.index - b.index);
  return { ...draft, layout: { ...draft.layout, columns }, touched: touch(draft, channel) };
}

function newColumn(channel: ChannelKey): LayoutColumn {
  return {
    channel,
    index: 0,
    name: null,
    unit: channelUnits[channel][0],
    knownBy: 'person',
    ...(statusChannels.includes(channel) ? { good: { codes: [0], mask: null, equals: null } } : {}),
    ...(channel === 'signalStrength' ? { higherIsBetter: true } : {}),
  };
}

export function changeColumnDetail(
  draft: LayoutDraft,
  channel: ChannelKey,
  detail: Partial<Pick<LayoutColumn, 'unit' | 'good' | 'higherIsBetter'>>,
): LayoutDraft {
  const columns = draft.layout.columns.map((column) =>
    column.channel === channel
      ? { ...column, ...detail, ...('unit' in detail ? { knownBy: 'person' as const } : {}) }
      : column,
  );
  return { ...draft, layout: { ...draft.layout, columns }, touched: touch(draft, channel) };
}

/**
 * What is still to be looked at: doubts of the proposal that nobody touched, and what does not work whatever was said.
 *
 * @param preview the first lines, read with the draft as it is now
 */
export function openProblems(draft: LayoutDraft, preview: Preview): LayoutProblem[] {
  const { touched, layout } = draft;
  const doubts = (draft.guess?.problems ?? []).filter((problem) => {
    if (problem.code === 'stamps-unreadable' || problem.code === 'quantity-missing') return false;
    if (problem.channel !== null) return !touched.includes(problem.channel);
    return problem.field === 'columns' || !touched.includes(problem.field);
  });
  const found: LayoutProblem[] = [];
  const add = (
    code: LayoutProblem['code'],
    field: LayoutProblem['field'],
    channel: ChannelKey | null,
    message: string,
  ): void => {
    found.push({ code, severity: 'blocks', field, channel, message });
  };
  for (const problem of draft.guess?.problems ?? []) {
    if (
      problem.code === 'quantity-missing' &&
      !layout.columns.some((column) => column.channel === problem.channel)
    )
      found.push(problem);
  }
  if (preview.rows.length === 0)
    add(
      'no-columns',
      'headerRows',
      null,
      'Below the header there is no row. Look at the number of header lines.',
    );
  else if (preview.rowsWithoutStamp > preview.rows.length * 0.1) {
    add(
      'stamps-unreadable',
      'time',
      null,
      `${preview.rowsWithoutStamp} of the first ${preview.rows.length} rows have no readable time. Look at where the time comes from.`,
    );
  }
  for (const column of preview.columns) {
    if (preview.rows.length > 0 && column.unreadable > preview.rows.length * 0.1) {
      add(
        'no-columns',
        'columns',
        column.channel,
        `Column ${column.index + 1} holds words, not numbers, in ${column.unreadable} of the first ${preview.rows.length} rows.`,
      );
    }
  }
  // also for units that a person or a saved layout gave: the numbers may have changed since
  for (const column of preview.columns) {
    const unit = layout.columns.find((candidate) => candidate.channel === column.channel)?.unit ?? '';
    const isKnownDoubt = doubts.some((problem) => problem.channel === column.channel);
    if (!isKnownDoubt && !isOrdinaryForUnit(column.channel, unit, column.median)) {
      const words = channelWords[column.channel];
      found.push({
        code: 'unit-contradicts-range',
        severity: 'confirm',
        field: 'columns',
        channel: column.channel,
        message: `${words.charAt(0).toUpperCase()}${words.slice(1)}: values around ${formatNumber(column.median, column.median < 100 ? 2 : 0)} are not ordinary for ${unit}. Please look.`,
      });
    }
  }
  const parsed = layoutSchema.safeParse(layout);
  if (!parsed.success) {
    for (const issue of parsed.error.issues.slice(0, 4)) {
      if (found.some((problem) => problem.field === issue.path[0] || problem.code === 'quantity-missing'))
        continue;
      const field = String(issue.path[0] ?? 'columns');
      found.push({
        code: 'no-columns',
        severity: 'blocks',
        field: (field === 'name' ? 'columns' : field) as LayoutProblem['field'],
        channel: null,
        message: field === 'name' ? 'The layout needs a name.' : `${field}: ${issue.message}`,
      });
    }
  }
  return [...found, ...doubts].sort(
    (a, b) => Number(b.severity === 'blocks') - Number(a.severity === 'blocks'),
  );
}

/** The saved layout that is equal to the draft, so that it need not be saved again. */
export function equalLayout<Saved extends { layout: Layout }>(
  saved: readonly Saved[],
  layout: Layout,
): Saved | null {
  const hash = contentHash(layout);
  return saved.find((candidate) => contentHash(candidate.layout) === hash) ?? null;
}
