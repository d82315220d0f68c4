import type { Request } from 'express';
import multer from 'multer';
import { z } from 'zod';
import { rawFilesOf } from '../../db/queries/raw-files';
import type { RawFileRow } from '../../db/queries/raw-files';
import { checkHashesSchema, rereadSchema, uploadFieldsSchema } from '../contract/api';
import { AppError } from '../errors';
import { presentRawFile } from '../presenters/present';
import {
  acceptRawFile,
  checkHashes,
  rawFileOf,
  rereadRawFile,
  restoreRawFile,
  withdrawRawFile,
} from '../services/raw-files';
import { stationOf } from '../services/station-of';
import type { GroupContext } from './route';
import { created, groupRoute, idParams, ok, parsePart, stationParams } from './route';

type Accepted = { row: RawFileRow; duplicate: boolean };

const uploadQuery = z.object({
  compute: z
    .string()
    .regex(/^[0-9a-f]{64}$/)
    .optional(),
});

/**
 * Streams the one file of a multipart request into `acceptRawFile`; nothing is held in memory or written twice.
 */
async function receive(
  context: GroupContext,
  stationSlug: string,
  computeRecipeHash: string | null,
  req: Request,
): Promise<Accepted> {
  const station = await stationOf(context, stationSlug);
  let accepted: Accepted | null = null;
  const upload = multer({
    limits: {
      fileSize: context.deps.config.maxUploadBytes,
      files: 1,
      fields: 8,
      fieldSize: 1000,
      fieldNameSize: 100,
      parts: 9,
    },
    storage: {
      _handleFile: (request, file, done) => {
        void (async () => {
          const fields = parsePart(uploadFieldsSchema, request.body);
          return acceptRawFile(context, station, {
            ...fields,
            // The header is read as Latin-1; browsers send UTF-8.
            fileName: Buffer.from(file.originalname, 'latin1').toString('utf8'),
            computeRecipeHash,
            bytes: wholeStream(file.stream),
          });
        })().then(
          (result) => {
            accepted = result;
            done(null, {});
          },
          (cause: unknown) => {
            // The rest must be read away, or the request never ends.
            file.stream.resume();
            done(cause);
          },
        );
      },
      _removeFile: (_request, _file, done) => done(null),
    },
  }).any();
  await new Promise<void>((resolve, reject) => {
    upload(req, req.res!, (cause: unknown) => (cause ? reject(cause) : resolve()));
  });
  if (accepted === null) {
    throw new AppError('invalid_input', {
      userMessage:
        'The request carries no file, so nothing was stored. Send the fields id and layoutId, then one file.',
      fields: [{ path: 'file', message: 'missing' }],
    });
  }
  return accepted;
}

/** The bytes of an upload; fails when the limit cut it short, which the stream itself reports as a normal end. */
async function* wholeStream(
  stream: NodeJS.ReadableStream & { truncated?: boolean },
): AsyncGenerator<Uint8Array> {
  for await (const chunk of stream) yield chunk as Uint8Array;
  if (stream.truncated) throw new multer.MulterError('LIMIT_FILE_SIZE');
}

/** A name that can stand in a header, with the real one beside it. */
function attachment(fileName: string): string {
  const plain = fileName.replace(/[^\x20-\x7e]|["\\%]/g, '_');
  return `attachment; filename="${plain}"; filename*=UTF-8''${encodeURIComponent(fileName).replace(/['()*]/g, (c) => `%${c.charCodeAt(0).toString(16).toUpperCase()}`)}`;
}

export const rawFileRoutes = [
  groupRoute({
    method: 'get',
    path: '/stations/:station/raw-files',
    action: 'station.read',
    params: stationParams,
    handle: async (context, { params }) => {
      const { systemId } = await stationOf(context, params.station);
      return ok((await rawFilesOf(context.deps.db, systemId)).map(presentRawFile));
    },
  }),
  groupRoute({
    method: 'post',
    path: '/stations/:station/raw-files',
    action: 'rawFile.upload',
    params: stationParams,
    query: uploadQuery,
    handle: async (context, { params, query, req }) => {
      const { row, duplicate } = await receive(context, params.station, query.compute ?? null, req);
      return created({ rawFile: presentRawFile(row), duplicate }, !duplicate);
    },
  }),
  groupRoute({
    method: 'post',
    path: '/stations/:station/raw-files/check',
    action: 'rawFile.upload',
    params: stationParams,
    body: checkHashesSchema,
    handle: async (context, { params, body }) =>
      ok({ present: await checkHashes(context, await stationOf(context, params.station), body.sha256) }),
  }),
  groupRoute({
    method: 'get',
    path: '/raw-files/:id',
    action: 'station.read',
    params: idParams,
    handle: async (context, { params }) => ok(presentRawFile((await rawFileOf(context, params.id)).row)),
  }),
  groupRoute({
    method: 'post',
    path: '/raw-files/:id/withdraw',
    action: 'rawFile.withdraw',
    params: idParams,
    handle: async (context, { params }) => ok(presentRawFile(await withdrawRawFile(context, params.id))),
  }),
  groupRoute({
    method: 'post',
    path: '/raw-files/:id/restore',
    action: 'rawFile.withdraw',
    params: idParams,
    handle: async (context, { params }) => ok(presentRawFile(await restoreRawFile(context, params.id))),
  }),
  groupRoute({
    method: 'post',
    path: '/raw-files/:id/reread',
    action: 'rawFile.upload',
    params: idParams,
    body: rereadSchema,
    handle: async (context, { params, body }) =>
      ok(presentRawFile(await rereadRawFile(context, params.id, body.layoutId))),
  }),
  groupRoute({
    method: 'get',
    path: '/raw-files/:id/content',
    action: 'rawFile.download',
    params: idParams,
    handle: async (context, { params }) => {
      const { row } = await rawFileOf(context, params.id);
      return async (res) => {
        res.set({
          'content-type': 'application/octet-stream',
          'content-disposition': attachment(row.fileName),
          'cache-control': 'private, no-transform',
        });
        await new Promise<void>((resolve, reject) => {
          res.sendFile(context.deps.storage.path(row.sha256), { dotfiles: 'allow' }, (cause) =>
            // A reader that goes away half-way is no failure of ours.
            cause && !res.headersSent ? reject(cause) : resolve(),
          );
        });
      };
    },
  }),
];
