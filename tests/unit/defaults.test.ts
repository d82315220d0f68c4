import { describe, expect, it } from 'vitest';
import { defaultEntry, defaults, defaultValue } from '../../processing/defaults';
import { defaultRecipe } from '../../processing/schemas/recipe';

/** Every number of the recipe with its dotted path. */
function numbersOf(node: unknown, path: string): [string, number][] {
  if (typeof node === 'number') return [[path, node]];
  if (node === null || typeof node !== 'object') return [];
  return Object.entries(node).flatMap(([key, child]) => numbersOf(child, `${path}.${key}`));
}

describe('defaults table', () => {
  const recipeNumbers = numbersOf(defaultRecipe.settings, 'recipe');

  it('finds a useful number of numbers in the default recipe', () => {
    expect(recipeNumbers.length).toBeGreaterThanOrEqual(60);
  });

  it.each(recipeNumbers)('holds %s with the value of the default recipe', (key, value) => {
    expect(defaultValue(key)).toBe(value);
  });

  it('has no recipe entry that the default recipe lacks', () => {
    const known = new Set(recipeNumbers.map(([key]) => key));
    expect(defaults.filter((entry) => entry.key.startsWith('recipe.') && !known.has(entry.key))).toEqual([]);
  });

  it('has each key once, with unit, meaning and source', () => {
    expect(new Set(defaults.map((entry) => entry.key)).size).toBe(defaults.length);
    for (const entry of defaults) {
      expect(Number.isFinite(entry.value), entry.key).toBe(true);
      expect(entry.unit.length * entry.meaning.length * entry.source.length, entry.key).toBeGreaterThan(0);
    }
  });

  it('refuses an unknown key', () => {
    expect(() => defaultEntry('itc.nothing')).toThrow(RangeError);
    expect(defaultValue('itc.windW.nearNeutral.c1')).toBe(1.3);
  });
});
