import { membersOf } from '../../db/queries/groups';
import { runsInStates } from '../../db/queries/runs';
import { stationsOf } from '../../db/queries/stations';
import { rawFilesOf } from '../../db/queries/raw-files';
import type { GroupEvent, Jobs, Member } from '../contract/api';
import { saveRecipeSchema } from '../contract/api';
import { isRole } from '../policies/authorise';
import { presentRawFile, presentRecipe } from '../presenters/present';
import { listRecipes, saveRecipe } from '../services/recipes';
import { presentedRun } from '../services/runs';
import { created, groupRoute, ok } from './route';

const HEARTBEAT_MS = 20_000;
/** Then the browser connects anew, and who may listen is asked again. */
const LONGEST_STREAM_MS = 15 * 60_000;

export const groupRoutes = [
  groupRoute({
    method: 'get',
    path: '/members',
    action: 'member.list',
    handle: async ({ deps, group }) =>
      ok(
        (await membersOf(deps.db, group.id)).flatMap(({ userId, name, email, role }) =>
          isRole(role) ? [{ userId, name, email, role } satisfies Member] : [],
        ),
      ),
  }),
  groupRoute({
    method: 'get',
    path: '/recipes',
    action: 'result.read',
    handle: async ({ deps, group }) => ok((await listRecipes(deps.db, group.id)).map(presentRecipe)),
  }),
  groupRoute({
    method: 'post',
    path: '/recipes',
    action: 'recipe.save',
    body: saveRecipeSchema,
    handle: async ({ deps, group, person }, { body }) => {
      const { row, isNew } = await saveRecipe(deps.db, group.id, person.id, body.recipe);
      return created(presentRecipe(row), isNew);
    },
  }),
  groupRoute({
    method: 'get',
    path: '/jobs',
    action: 'group.read',
    handle: async ({ deps, group }) => {
      const rawFiles = [];
      for (const station of await stationsOf(deps.db, group.id)) {
        const rows = await rawFilesOf(deps.db, station.systemId);
        rawFiles.push(
          ...rows.map(presentRawFile).filter(({ state }) => state === 'stored' || state === 'reading'),
        );
      }
      const runs = [];
      for (const row of await runsInStates(deps.db, ['waiting', 'reading', 'computing'], group.id)) {
        runs.push(await presentedRun(deps, row));
      }
      return ok({ rawFiles, runs } satisfies Jobs);
    },
  }),
  groupRoute({
    method: 'get',
    path: '/events',
    action: 'group.read',
    handle: async ({ deps, group }, { req }) => {
      return async (res) => {
        res.status(200).set({
          'content-type': 'text/event-stream',
          'cache-control': 'no-cache, no-transform',
          'x-accel-buffering': 'no',
        });
        res.flushHeaders();
        const write = (event: GroupEvent) => res.write(`data: ${JSON.stringify(event)}\n\n`);
        // Who comes back after a break may have missed something.
        if (req.get('last-event-id') !== undefined) write({ type: 'resync' });
        else res.write(': open\n\n');
        const stop = deps.events.listen(group.id, write);
        const heartbeat = setInterval(() => res.write(': still here\n\n'), HEARTBEAT_MS);
        const end = setTimeout(() => res.end(), LONGEST_STREAM_MS);
        const forget = deps.events.onClose(() => res.end());
        await new Promise<void>((resolve) => {
          res.on('close', resolve);
        });
        forget();
        clearInterval(heartbeat);
        clearTimeout(end);
        stop();
      };
    },
  }),
];
