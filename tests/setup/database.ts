import { randomBytes } from 'node:crypto';
import knex from 'knex';

export interface FreshDatabase {
  /** With the owner's role, for rows and for looking; with the application's, for the code under test. */
  ownerUrl: string;
  appUrl: string;
  drop(): Promise<void>;
}

/** A migrated database that nobody else has: a clone of the run's template. */
export async function freshDatabase(): Promise<FreshDatabase> {
  const base = process.env.TEST_PG_URL;
  if (!base) throw new Error('TEST_PG_URL is missing: run tests with tests/vitest.config.ts.');
  const name = `test_${randomBytes(6).toString('hex')}`;
  const asAdmin = async (sql: string) => {
    const admin = knex({ client: 'pg', connection: base, pool: { min: 0, max: 1 } });
    await admin.raw(sql).finally(() => admin.destroy());
  };
  await asAdmin(`CREATE DATABASE ${name} TEMPLATE plimsoll_template OWNER plimsoll_owner`);
  const as = (username: string, password: string) => {
    const url = new URL(base);
    return Object.assign(url, { username, password, pathname: `/${name}` }).href;
  };
  return {
    ownerUrl: as('plimsoll_owner', 'owner'),
    appUrl: as('plimsoll_app', 'app'),
    drop: () => asAdmin(`DROP DATABASE ${name} WITH (FORCE)`),
  };
}
