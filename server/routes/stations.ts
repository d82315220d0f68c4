import { z } from 'zod';
import { layoutsOf, setUpsOf } from '../../db/queries/stations';
import {
  addSetUpSchema,
  changeStationSchema,
  createStationSchema,
  idSchema,
  saveLayoutSchema,
  startRunSchema,
} from '../contract/api';
import { presentLayout, presentSetUp } from '../presenters/present';
import { presentedRun, presentedRuns, runOf, startRun } from '../services/runs';
import { notFound } from '../errors';
import { shownRun, spineOf } from '../services/spine';
import { stationSummaries, stationSummary } from '../services/summaries';
import {
  addSetUp,
  changeStation,
  createStation,
  removeStation,
  saveLayout,
  stationDeletion,
} from '../services/stations';
import { stationOf } from '../services/station-of';
import { created, empty, groupRoute, ok, stationParams } from './route';

const confirmQuery = z.object({ confirm: z.string().max(100).default('') });

export const spanQuery = z.object({
  fromMs: z.coerce.number().finite().optional(),
  toMs: z.coerce.number().finite().optional(),
});

export const stationRoutes = [
  groupRoute({
    method: 'get',
    path: '/stations',
    action: 'station.read',
    handle: async ({ deps, group }) => ok(await stationSummaries(deps, group.id)),
  }),
  groupRoute({
    method: 'post',
    path: '/stations',
    action: 'station.create',
    body: createStationSchema,
    handle: async (context, { body }) => {
      const { row, isNew } = await createStation(context, body);
      return created(await stationSummary(context.deps, row), isNew);
    },
  }),
  groupRoute({
    method: 'get',
    path: '/stations/:station',
    action: 'station.read',
    params: stationParams,
    handle: async (context, { params }) =>
      ok(await stationSummary(context.deps, await stationOf(context, params.station))),
  }),
  groupRoute({
    method: 'patch',
    path: '/stations/:station',
    action: 'station.change',
    params: stationParams,
    body: changeStationSchema,
    handle: async (context, { params, body }) =>
      ok(await stationSummary(context.deps, await changeStation(context, params.station, body))),
  }),
  groupRoute({
    method: 'get',
    path: '/stations/:station/deletion',
    action: 'station.delete',
    params: stationParams,
    handle: async (context, { params }) => ok(await stationDeletion(context, params.station)),
  }),
  groupRoute({
    method: 'delete',
    path: '/stations/:station',
    action: 'station.delete',
    params: stationParams,
    query: confirmQuery,
    handle: async (context, { params, query }) => {
      await removeStation(context, params.station, query.confirm);
      return empty;
    },
  }),
  groupRoute({
    method: 'get',
    path: '/stations/:station/set-ups',
    action: 'station.read',
    params: stationParams,
    handle: async (context, { params }) => {
      const { systemId } = await stationOf(context, params.station);
      return ok((await setUpsOf(context.deps.db, systemId)).map(presentSetUp));
    },
  }),
  groupRoute({
    method: 'post',
    path: '/stations/:station/set-ups',
    action: 'setUp.add',
    params: stationParams,
    body: addSetUpSchema,
    handle: async (context, { params, body }) => {
      const { row, isNew, staleRuns } = await addSetUp(context, params.station, body);
      return created({ revision: presentSetUp(row), staleRuns }, isNew);
    },
  }),
  groupRoute({
    method: 'get',
    path: '/stations/:station/layouts',
    action: 'station.read',
    params: stationParams,
    handle: async (context, { params }) => {
      const { systemId } = await stationOf(context, params.station);
      return ok((await layoutsOf(context.deps.db, systemId)).map(presentLayout));
    },
  }),
  groupRoute({
    method: 'post',
    path: '/stations/:station/layouts',
    action: 'layout.save',
    params: stationParams,
    body: saveLayoutSchema,
    handle: async (context, { params, body }) => {
      const { row, isNew } = await saveLayout(context, params.station, body);
      return created(presentLayout(row), isNew);
    },
  }),
  groupRoute({
    method: 'get',
    path: '/stations/:station/runs',
    action: 'result.read',
    params: stationParams,
    handle: async (context, { params }) =>
      ok(await presentedRuns(context.deps, await stationOf(context, params.station))),
  }),
  groupRoute({
    method: 'post',
    path: '/stations/:station/runs',
    action: 'run.start',
    params: stationParams,
    body: startRunSchema,
    handle: async (context, { params, body }) => {
      const { row, isNew } = await startRun(context, params.station, body);
      return created(await presentedRun(context.deps, row), isNew);
    },
  }),
  groupRoute({
    method: 'get',
    path: '/stations/:station/spine',
    action: 'result.read',
    params: stationParams,
    query: spanQuery.extend({
      run: idSchema.optional(),
      bins: z.coerce.number().int().min(1).max(4000).default(400),
    }),
    handle: async (context, { params, query }) => {
      const station = await stationOf(context, params.station);
      const run =
        query.run === undefined
          ? await shownRun(context.deps, station.systemId)
          : await runOf(context, query.run);
      if (run !== null && run.systemId !== station.systemId) throw notFound('run');
      return ok(
        await spineOf(context.deps, station, {
          run,
          fromMs: query.fromMs,
          toMs: query.toMs,
          bins: query.bins,
        }),
      );
    },
  }),
];

export { confirmQuery };
