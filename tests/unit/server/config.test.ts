import { describe, expect, it } from 'vitest';
import { readConfig } from '../../../server/config';

describe('settings from the environment', () => {
  it('have defaults that keep everything on this machine', () => {
    expect(readConfig({})).toMatchObject({ port: 4310, host: '127.0.0.1', demo: true, databaseUrl: null });
  });

  it('name every variable that cannot be used', () => {
    expect(() => readConfig({ PORT: '70000', DATABASE_URL: 'mysql://x/y' })).toThrow(
      /PORT:.*\n.*DATABASE_URL:/s,
    );
  });

  it('never seed the demonstration where others can reach it', () => {
    expect(readConfig({ HOST: '0.0.0.0' }).demo).toBe(false);
    expect(() => readConfig({ HOST: '0.0.0.0', GUSTBOOK_DEMO: '1' })).toThrow('loopback');
    expect(readConfig({ GUSTBOOK_DEMO: '0' }).demo).toBe(false);
  });

  it('seed a first group instead of the demonstration when one is named', () => {
    const config = readConfig({ GUSTBOOK_FIRST_GROUP: 'Reedmoor', GUSTBOOK_FIRST_LEAD: 'lead@example.org' });
    expect(config).toMatchObject({
      demo: false,
      first: { groupName: 'Reedmoor', leadEmail: 'lead@example.org' },
    });
    expect(() => readConfig({ GUSTBOOK_FIRST_GROUP: 'Reedmoor' })).toThrow('belong together');
  });
});
