import { randomUUID } from 'node:crypto';
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { toNodeHandler } from 'better-auth/node';
import compression from 'compression';
import express from 'express';
import type { ErrorRequestHandler, Express, RequestHandler } from 'express';
import { rateLimit } from 'express-rate-limit';
import helmet from 'helmet';
import multer from 'multer';
import { pinoHttp } from 'pino-http';
import { LOOPBACK_HEADER } from './auth/auth';
import { isFromLoopback } from './auth/loopback';
import { isOpenAuthRoute } from './auth/open-routes';
import type { ErrorEnvelope } from './contract/errors';
import type { Deps } from './deps';
import { AppError, notFound } from './errors';
import { projectRoot } from './paths';
import { groupRoutes } from './routes/groups';
import { meRoutes } from './routes/me';
import { rawFileRoutes } from './routes/raw-files';
import type { RouteEntry } from './routes/route';
import { runRoutes } from './routes/runs';
import { stationRoutes } from './routes/stations';

/** Every route of the interface, in one list: what is not in it is not served. */
export const routeTable: readonly RouteEntry[] = [
  ...meRoutes,
  ...groupRoutes,
  ...stationRoutes,
  ...rawFileRoutes,
  ...runRoutes,
];

const MINUTE_MS = 60_000;

export interface AppOptions {
  /** The exported client; requests for pages answer 503 while it is not there. */
  webFolder?: string;
}

export function createApp(
  deps: Deps,
  { webFolder = join(projectRoot, 'dist', 'web') }: AppOptions = {},
): Express {
  const app = express();
  app.disable('x-powered-by');
  app.set('query parser', 'simple');
  app.use(
    pinoHttp({
      logger: deps.log,
      genReqId: (_req, res) => {
        const id = randomUUID();
        res.setHeader('x-request-id', id);
        return id;
      },
      customLogLevel: (_req, res, cause) => {
        if (cause || res.statusCode >= 500) return 'error';
        return res.statusCode >= 400 ? 'info' : 'debug';
      },
      // Query strings may carry reset tokens.
      serializers: {
        req: (req: { id: string; method: string; url: string }) => ({
          id: req.id,
          method: req.method,
          path: req.url.split('?')[0],
        }),
        res: (res: { statusCode: number }) => ({ statusCode: res.statusCode }),
      },
    }),
  );
  app.use(securityHeaders(deps));
  app.use(
    compression({
      filter: (req, res) => !isEventStream(res.getHeader('content-type')) && compression.filter(req, res),
    }),
  );

  app.use('/api', (_req, res, next) => {
    res.set('cache-control', 'no-store');
    next();
  });
  const limited = limiter(deps.rateLimits.general);
  app.use('/api/auth/sign-in', limiter(deps.rateLimits.signIn));
  app.use('/api/auth/request-password-reset', limiter(deps.rateLimits.signIn));
  // The sign-in library reads the body itself: it stands before express.json().
  const authHandler = toNodeHandler(deps.auth);
  app.all('/api/auth/*splat', limited, (req, res, next) => {
    if (!isOpenAuthRoute(req.method, req.path.slice('/api/auth'.length))) return next(notFound('address'));
    req.headers[LOOPBACK_HEADER] = isFromLoopback(req) ? '1' : '0';
    authHandler(req, res).catch(next);
  });
  app.use('/api', express.json({ limit: '1mb' }));
  for (const entry of routeTable) app[entry.method](entry.path, limited, entry.handler(deps));
  app.use('/api', (_req, _res, next) => next(notFound('address')));

  serveClient(app, webFolder);
  app.use(errorHandler(deps));
  return app;
}

function isEventStream(type: number | string | string[] | undefined): boolean {
  return String(type ?? '').startsWith('text/event-stream');
}

function securityHeaders(deps: Deps): RequestHandler {
  const isHttps = deps.config.publicUrl?.startsWith('https://') ?? false;
  return helmet({
    contentSecurityPolicy: {
      useDefaults: false,
      directives: {
        defaultSrc: ["'self'"],
        // The row reader is WebAssembly.
        scriptSrc: ["'self'", "'wasm-unsafe-eval'"],
        styleSrc: ["'self'", "'unsafe-inline'"],
        imgSrc: ["'self'", 'data:', 'blob:'],
        fontSrc: ["'self'"],
        workerSrc: ["'self'"],
        connectSrc: ["'self'"],
        objectSrc: ["'none'"],
        baseUri: ["'self'"],
        formAction: ["'self'"],
        frameAncestors: ["'none'"],
      },
    },
    strictTransportSecurity: isHttps,
  });
}

function limiter(perMinute: number): RequestHandler {
  return rateLimit({
    windowMs: MINUTE_MS,
    limit: perMinute,
    standardHeaders: 'draft-8',
    legacyHeaders: false,
    handler: (_req, _res, next) =>
      next(
        new AppError('too_many_requests', {
          userMessage:
            'Too many requests came from here within a minute. Nothing was changed. Wait a minute and try again.',
        }),
      ),
  });
}

/** The exported client: hashed files for ever, the page itself never from a cache, every other address is the page. */
function serveClient(app: Express, webFolder: string): void {
  const forever = { immutable: true, maxAge: '365d', index: false, fallthrough: false } as const;
  for (const folder of ['_expo', 'assets', 'fonts']) {
    app.use(`/${folder}`, express.static(join(webFolder, folder), forever));
  }
  app.use(express.static(webFolder, { index: false, maxAge: 0 }));
  app.get('/{*any}', (req, res, next) => {
    // A missing file is not a page.
    if (/\.[A-Za-z0-9]{1,8}$/.test(req.path)) return next(notFound('file'));
    const page = join(webFolder, 'index.html');
    if (!existsSync(page)) {
      return next(
        new AppError('unavailable', {
          message: 'dist/web is missing',
          userMessage:
            'The pages of Gustbook are not built yet; the interface under /api works. Run "npm start", which builds them.',
        }),
      );
    }
    res.set('cache-control', 'no-cache');
    res.sendFile(page);
  });
}

/** Turns whatever was thrown into one of the contract's errors. */
function asAppError(cause: unknown): AppError {
  if (cause instanceof AppError) return cause;
  if (cause instanceof multer.MulterError) {
    if (cause.code === 'LIMIT_FILE_SIZE') {
      return new AppError('too_large', {
        userMessage:
          'The file is larger than this server takes in one file. Nothing was stored. Split it, or ask for a higher limit.',
        cause,
      });
    }
    return new AppError('invalid_input', {
      userMessage:
        'The upload is not as it must be: the fields id and layoutId, then one file. Nothing of the rest was stored. Send each file by itself.',
      fields: [{ path: cause.field ?? 'file', message: cause.message }],
      cause,
    });
  }
  const { status, type } = (cause ?? {}) as { status?: unknown; type?: unknown };
  if (type === 'entity.too.large') {
    return new AppError('too_large', {
      userMessage: 'The request is too large. Nothing was changed.',
      cause,
    });
  }
  if (status === 404) return notFound('file');
  if (typeof status === 'number' && status >= 400 && status < 500) {
    return new AppError('invalid_input', {
      userMessage:
        'The request could not be read. Nothing was changed. It must be well-formed JSON, or a multipart upload.',
      cause,
    });
  }
  if (
    cause instanceof Error &&
    /^(Unexpected end of form|Malformed part header|Multipart: Boundary not found)/.test(cause.message)
  ) {
    return new AppError('invalid_input', {
      userMessage: 'The upload was cut off or is malformed, so nothing was stored. Send it again.',
      cause,
    });
  }
  return new AppError('internal', {
    message: cause instanceof Error ? cause.message : String(cause),
    userMessage:
      'Something went wrong on the server. What was stored before is safe. Try again; if it happens again, tell whoever runs this server the request number.',
    cause,
  });
}

function errorHandler(deps: Deps): ErrorRequestHandler {
  return (cause: unknown, req, res, _next) => {
    const error = asAppError(cause);
    const requestId = String(req.id);
    if (error.status >= 500) deps.log.error({ err: error, requestId }, 'request failed');
    else deps.log.debug({ code: error.code, reason: error.message, requestId }, 'request refused');
    if (res.headersSent) {
      res.destroy();
      return;
    }
    const envelope: ErrorEnvelope = {
      error: {
        code: error.code,
        message: error.userMessage,
        requestId,
        ...(error.fields ? { fields: error.fields } : {}),
      },
    };
    res.status(error.status).json(envelope);
  };
}
