import { z } from 'zod';
import { presentPeriod, presentPeriodDetail } from '../presenters/present';
import { periodOf, periodsOf, seriesOf } from '../services/results';
import { exportRun } from '../services/export';
import { cancelRun, presentedRun, removeRun, runDeletion, runOf } from '../services/runs';
import { empty, groupRoute, idParams, ok } from './route';
import { confirmQuery, spanQuery } from './stations';

export const runRoutes = [
  groupRoute({
    method: 'get',
    path: '/runs/:id',
    action: 'result.read',
    params: idParams,
    handle: async (context, { params }) =>
      ok(await presentedRun(context.deps, await runOf(context, params.id))),
  }),
  groupRoute({
    method: 'delete',
    path: '/runs/:id',
    action: 'run.delete',
    params: idParams,
    query: confirmQuery,
    handle: async (context, { params, query }) => {
      await removeRun(context, params.id, query.confirm);
      return empty;
    },
  }),
  groupRoute({
    method: 'get',
    path: '/runs/:id/deletion',
    action: 'run.delete',
    params: idParams,
    handle: async (context, { params }) => ok(await runDeletion(context, params.id)),
  }),
  groupRoute({
    method: 'post',
    path: '/runs/:id/cancel',
    action: 'run.cancel',
    params: idParams,
    handle: async (context, { params }) =>
      ok(await presentedRun(context.deps, await cancelRun(context, params.id))),
  }),
  groupRoute({
    method: 'get',
    path: '/runs/:id/series',
    action: 'result.read',
    params: idParams,
    query: spanQuery.extend({ quantities: z.string().max(4000).default('') }),
    handle: async (context, { params, query }) => {
      const run = await runOf(context, params.id);
      const keys = [...new Set(query.quantities.split(',').filter((key) => key !== ''))];
      return ok(await seriesOf(context.deps, run, keys, query.fromMs, query.toMs));
    },
  }),
  groupRoute({
    method: 'get',
    path: '/runs/:id/periods',
    action: 'result.read',
    params: idParams,
    query: spanQuery,
    handle: async (context, { params, query }) => {
      const run = await runOf(context, params.id);
      return ok((await periodsOf(context.deps, run, query.fromMs, query.toMs)).map(presentPeriod));
    },
  }),
  groupRoute({
    method: 'get',
    path: '/runs/:id/periods/:startMs',
    action: 'result.read',
    params: idParams.extend({ startMs: z.coerce.number().int() }),
    handle: async (context, { params }) => {
      const run = await runOf(context, params.id);
      const { row, rawFiles, neighbours } = await periodOf(context.deps, run, params.startMs);
      return ok(presentPeriodDetail(row, rawFiles, neighbours));
    },
  }),
  groupRoute({
    method: 'get',
    path: '/runs/:id/export',
    action: 'result.export',
    params: idParams,
    query: spanQuery.extend({ format: z.enum(['exchange', 'plain']).default('exchange') }),
    handle: async (context, { params, query }) => {
      const run = await runOf(context, params.id);
      return exportRun(context.deps, run, query.format, query.fromMs, query.toMs);
    },
  }),
];
