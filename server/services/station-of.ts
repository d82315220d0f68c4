import { stationBySlug } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { notFound } from '../errors';
import type { GroupContext } from '../routes/route';

/** @throws AppError not_found, also for a station of another group */
export async function stationOf(
  { deps, group }: Pick<GroupContext, 'deps' | 'group'>,
  slug: string,
): Promise<StationRow> {
  const row = await stationBySlug(deps.db, group.id, slug);
  if (row === null) throw notFound('station');
  return row;
}
