import { insertRecipe, recipeByHash, recipesOf } from '../../db/queries/runs';
import type { RecipeRow } from '../../db/queries/runs';
import type { Db } from '../../db/client';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import type { Recipe } from '../../processing/schemas/recipe';
import { AppError, notFound } from '../errors';

/** Every group starts with the default recipe; a new default of a later version joins the older one. */
async function ensureDefault(db: Db, groupId: string): Promise<void> {
  await insertRecipe(db, {
    groupId,
    hash: recipeHash(defaultRecipe),
    recipe: defaultRecipe,
    createdBy: null,
  });
}

export async function listRecipes(db: Db, groupId: string): Promise<RecipeRow[]> {
  await ensureDefault(db, groupId);
  return recipesOf(db, groupId);
}

/** @throws AppError not_found */
export async function recipeOf(db: Db, groupId: string, hash: string): Promise<RecipeRow> {
  const found = await recipeByHash(db, groupId, hash);
  if (found !== null) return found;
  await ensureDefault(db, groupId);
  const again = await recipeByHash(db, groupId, hash);
  if (again === null) throw notFound('recipe');
  return again;
}

/** Keeps a recipe; settings that the group has already are success with the existing recipe. */
export async function saveRecipe(
  db: Db,
  groupId: string,
  userId: string,
  recipe: Recipe,
): Promise<{ row: RecipeRow; isNew: boolean }> {
  await ensureDefault(db, groupId);
  if (recipe.parentHash !== null && (await recipeByHash(db, groupId, recipe.parentHash)) === null) {
    throw new AppError('invalid_input', {
      userMessage:
        'The recipe names a parent that this group does not have. Nothing was saved. Choose one of the recipes listed.',
      fields: [{ path: 'recipe.parentHash', message: 'No such recipe in this group.' }],
    });
  }
  const hash = recipeHash(recipe);
  const isNew = await insertRecipe(db, { groupId, hash, recipe, createdBy: userId });
  return { row: await recipeOf(db, groupId, hash), isNew };
}
