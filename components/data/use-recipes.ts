import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { z } from 'zod';
import type { Recipe } from '../../processing/schemas/recipe';
import { recipeRecordSchema } from '../../server/contract/api';
import type { RecipeRecord } from '../../server/contract/api';
import { api } from './api-client';

/** Recipes of a group; each is immutable and known by the hash of its settings. */

export const recipeKeys = {
  all: (group: string) => ['group', group, 'recipes'] as const,
};

export function useRecipes(group: string) {
  return useQuery({
    queryKey: recipeKeys.all(group),
    queryFn: ({ signal }) =>
      api(`/groups/${encodeURIComponent(group)}/recipes`, {
        signal,
        parse: (value) => z.array(recipeRecordSchema).parse(value),
      }),
  });
}

/** Saves a recipe; equal settings answer with the recipe that is there already. */
export function useSaveRecipe(group: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (recipe: Recipe) =>
      api(`/groups/${encodeURIComponent(group)}/recipes`, {
        method: 'POST',
        body: { recipe },
        parse: (value) => recipeRecordSchema.parse(value),
      }),
    onSuccess: (saved) => {
      client.setQueryData<RecipeRecord[]>(recipeKeys.all(group), (recipes) =>
        recipes && !recipes.some((recipe) => recipe.hash === saved.hash) ? [...recipes, saved] : recipes,
      );
      void client.invalidateQueries({ queryKey: recipeKeys.all(group) });
    },
  });
}
