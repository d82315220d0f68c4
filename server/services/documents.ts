import type { LayoutRow, SetUpRow, StationRow } from '../../db/queries/stations';
import type { RawFileRow } from '../../db/queries/raw-files';
import type { RecipeRow, RunRow } from '../../db/queries/runs';
import type { IngestReport } from '../../processing/chunks/chunk';
import type { InputManifest } from '../../processing/run-plan';
import type { Layout } from '../../processing/schemas/layout';
import type { Recipe } from '../../processing/schemas/recipe';
import type { SetUp, Station } from '../../processing/schemas/set-up';

/** Documents come out of the database as they went in, and they went in through their schema: the types are told here, once. */

export const stationDocument = (row: Pick<StationRow, 'station'>) => row.station as Station;
export const setUpDocument = (row: Pick<SetUpRow, 'setUp'>) => row.setUp as SetUp;
export const layoutDocument = (row: Pick<LayoutRow, 'layout'> | Pick<RawFileRow, 'layout'>) =>
  row.layout as Layout;
export const reportDocument = (row: Pick<RawFileRow, 'report'>) => row.report as IngestReport | null;
export const recipeDocument = (row: Pick<RecipeRow, 'recipe'>) => row.recipe as Recipe;
export const manifestDocument = (row: Pick<RunRow, 'manifest'>) => row.manifest as InputManifest | null;
