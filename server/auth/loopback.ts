import type { IncomingMessage } from 'node:http';

/** Whether a request was sent on this very machine, without a proxy in between. */
export function isFromLoopback(req: IncomingMessage): boolean {
  if (req.headers['x-forwarded-for'] !== undefined || req.headers.forwarded !== undefined) return false;
  const address = req.socket.remoteAddress ?? '';
  return address === '::1' || /^(::ffff:)?127\./.test(address);
}
