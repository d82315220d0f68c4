import { describe, expect, it } from 'vitest';
import { defaultRecipe, recipeSettingsSchema } from '../../../../processing/schemas/recipe';
import {
  changeSetting,
  methodsText,
  recipeDifferences,
  recipeParagraphs,
  settingAt,
} from '../../../../components/recipes/recipe-paragraph';
import type { ValuePart } from '../../../../components/recipes/recipe-paragraph';

const usual = defaultRecipe.settings;
const parts = recipeParagraphs(usual).flatMap((paragraph) =>
  paragraph.parts.filter((part): part is ValuePart => typeof part !== 'string'),
);
const part = (path: string): ValuePart => parts.find((candidate) => candidate.path === path)!;

describe('a recipe as a paragraph', () => {
  it('points every value at a setting that exists, once', () => {
    for (const { path } of parts) expect(settingAt(usual, path), path).not.toBeUndefined();
    expect(new Set(parts.map(({ path }) => path)).size).toBe(parts.length);
  });

  it('offers only choices that the schema takes', () => {
    for (const one of parts) {
      for (const { value } of one.choices ?? []) {
        expect(
          recipeSettingsSchema.safeParse(changeSetting(usual, one, value)).success,
          `${one.path} ${value}`,
        ).toBe(true);
      }
    }
  });

  it('can switch off only what the schema lets be off', () => {
    for (const one of parts.filter(({ choices }) => !choices)) {
      expect(recipeSettingsSchema.safeParse(changeSetting(usual, one, null)).success, one.path).toBe(
        one.offWord !== undefined,
      );
    }
  });

  it('reads as the methods text of a paper', () => {
    const text = methodsText(usual);
    expect(text).toContain(
      'Fluxes are averaged over 30 min. A period with more than 10 % of its samples missing is usable at best',
    );
    expect(text).toContain(
      'Spikes are found by median/MAD at 7 robust standard deviations from the median, without detrending first, and left as gaps.',
    );
    expect(text).toContain('Axes follow double rotation; fluctuations are departures from the block mean.');
    expect(methodsText(changeSetting(usual, part('despiking.method'), 'none'))).toContain(
      'Spikes are not looked for.',
    );
  });

  it('lists what differs, each once, with words for what does not apply', () => {
    const strict = changeSetting(
      changeSetting(usual, part('steadyState.usablePercent'), 30),
      part('despiking.method'),
      'none',
    );
    expect(recipeDifferences(usual, usual)).toEqual([]);
    expect(recipeDifferences(usual, strict)).toEqual([
      {
        path: 'despiking.method',
        label: 'despiking',
        before: 'found by median/MAD',
        after: 'not looked for',
      },
      {
        path: 'despiking.threshold',
        label: 'spikes beyond',
        before: '7 robust standard deviations',
        after: 'does not apply',
      },
      {
        path: 'despiking.detrendFirst',
        label: 'detrending before despiking',
        before: 'without detrending first',
        after: 'does not apply',
      },
      {
        path: 'steadyState.usablePercent',
        label: 'steady state, rejected above',
        before: '100 %',
        after: '30 %',
      },
    ]);
  });

  it('does not hide a difference in a setting that the paragraph leaves out', () => {
    const other = structuredClone(usual);
    other.screening.amplitudeResolution.bins = 50;
    expect(recipeDifferences(usual, other)).toEqual([
      {
        path: 'screening.amplitudeResolution.bins',
        label: 'screening.amplitudeResolution.bins',
        before: '100',
        after: '50',
      },
    ]);
  });

  it('brings the usual settings of a method that is chosen again', () => {
    const none = changeSetting(usual, part('storage.method'), 'none');
    expect(none.storage).toEqual({ method: 'none' });
    expect(changeSetting(none, part('storage.method'), 'single-level').storage).toEqual(usual.storage);
    expect(usual.storage.method).toBe('single-level');
  });
});
