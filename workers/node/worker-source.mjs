// Runs the worker's TypeScript sources on a pool thread; the bundle beside the server needs none of this.
import { register as registerRequire } from 'tsx/cjs/api';
import { register as registerImport } from 'tsx/esm/api';

registerRequire();
registerImport();
const worker = await import('./worker.ts');

export const ingest = worker.ingest ?? worker.default.ingest;
export const compute = worker.compute ?? worker.default.compute;
export const meet = worker.meet ?? worker.default.meet;
