export * from './auth';
export * from './records';
export * from './results';
