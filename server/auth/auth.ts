import { apiKey } from '@better-auth/api-key';
import { betterAuth } from 'better-auth';
import { APIError, createAuthMiddleware } from 'better-auth/api';
import { drizzleAdapter } from 'better-auth/adapters/drizzle';
import { organization } from 'better-auth/plugins';
import type { Db } from '../../db/client';
import * as schema from '../../db/schema';
import type { Log } from '../log';
import type { SendMail } from '../mail/outbox';
import { accessControl, pluginRoles } from './access';
import { isDemoEmail } from './demo-accounts';

/** Set by our own middleware on every request, whatever the client sent. */
export const LOOPBACK_HEADER = 'x-gustbook-loopback';

export interface AuthOptions {
  db: Db;
  secret: string;
  baseUrl: string;
  trustedOrigins: string[];
  sendMail: SendMail;
  log: Log;
}

export function createAuth(options: AuthOptions) {
  return betterAuth({
    appName: 'Gustbook',
    baseURL: options.baseUrl,
    basePath: '/api/auth',
    secret: options.secret,
    trustedOrigins: options.trustedOrigins,
    database: drizzleAdapter(options.db as never, { provider: 'pg', schema, transaction: true }),
    emailAndPassword: {
      enabled: true,
      // People come in by invitation of a group, never by themselves.
      disableSignUp: true,
      minPasswordLength: 12,
      maxPasswordLength: 200,
      revokeSessionsOnPasswordReset: true,
      sendResetPassword: async ({ user, url }) => {
        await options.sendMail({
          to: user.email,
          subject: 'Choose a new Gustbook password',
          text:
            `Somebody, probably you, asked for a new password for ${user.email}.\n\n` +
            `Open this address within an hour to choose one:\n${url}\n\n` +
            'If it was not you, do nothing: your password stays as it is.',
        });
      },
      resetPasswordTokenExpiresIn: 3600,
    },
    session: { expiresIn: 60 * 60 * 24 * 14, updateAge: 60 * 60 * 24 },
    // Requests are counted once, in front of all routes.
    rateLimit: { enabled: false },
    telemetry: { enabled: false },
    logger: {
      level: 'warn',
      // What it calls an error is mostly a person's slip (a wrong password, a foreign page).
      log: (level, message, ...details) => options.log.info({ level, details }, `sign-in: ${message}`),
    },
    advanced: {
      // Without this the library drops its origin check when it believes that it runs under test.
      disableOriginCheck: false,
      disableCSRFCheck: false,
      cookiePrefix: 'gustbook',
      useSecureCookies: options.baseUrl.startsWith('https://'),
    },
    hooks: {
      before: createAuthMiddleware(async (ctx) => {
        if (ctx.path !== '/sign-in/email') return;
        const email = (ctx.body as { email?: unknown } | undefined)?.email;
        if (typeof email === 'string' && isDemoEmail(email) && ctx.headers?.get(LOOPBACK_HEADER) !== '1') {
          throw new APIError('FORBIDDEN', {
            code: 'DEMO_ON_LOOPBACK_ONLY',
            message: 'Demonstration accounts work only on the machine that Gustbook runs on.',
          });
        }
      }),
    },
    plugins: [
      organization({
        ac: accessControl,
        roles: pluginRoles,
        creatorRole: 'lead',
        allowUserToCreateOrganization: false,
      }),
      apiKey({
        defaultPrefix: 'gust_',
        requireName: true,
        // The library's own default is ten requests a day; ours are counted in front of all routes.
        rateLimit: { enabled: false },
        enableSessionForAPIKeys: false,
      }),
    ],
  });
}

export type Auth = ReturnType<typeof createAuth>;
