import { pino } from 'pino';
import type { Logger } from 'pino';

export type Log = Logger;

/** One line of JSON per event; what could open a door is left out. */
export function createLog(level: string, file: string | null = null): Log {
  const options = {
    level,
    redact: {
      paths: [
        'req.headers.cookie',
        'req.headers.authorization',
        'req.headers["x-api-key"]',
        'res.headers["set-cookie"]',
      ],
      censor: '[left out]',
    },
  };
  return file === null ? pino(options) : pino(options, pino.destination({ dest: file, mkdir: true }));
}
