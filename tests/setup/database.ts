/** A database per test file: a copy of the migrated template, gone when the file is done. */
import { randomBytes } from 'node:crypto';
import pg from 'pg';

export const templateDatabase = 'plimsoll_template';

export interface FreshDatabase {
  /** May change everything: for making rows and looking at them. */
  ownerUrl: string;
  /** What the product runs as. */
  appUrl: string;
  drop(): Promise<void>;
}

async function asSuperuser(sql: string): Promise<void> {
  const client = new pg.Client({ connectionString: `${process.env.TEST_PG_URL}/postgres` });
  await client.connect();
  try {
    await client.query(sql);
  } finally {
    await client.end();
  }
}

export async function freshDatabase(): Promise<FreshDatabase> {
  if (!process.env.TEST_PG_URL)
    throw new Error('TEST_PG_URL is missing: run vitest with tests/vitest.config.ts');
  const name = `test_${randomBytes(6).toString('hex')}`;
  await asSuperuser(`CREATE DATABASE ${name} TEMPLATE ${templateDatabase} OWNER plimsoll_owner`);
  const as = (user: string, password: string) => {
    const url = new URL(`${process.env.TEST_PG_URL}/${name}`);
    url.username = user;
    url.password = password;
    return url.href;
  };
  return {
    ownerUrl: as('plimsoll_owner', 'owner'),
    appUrl: as('plimsoll_app', 'app'),
    drop: () => asSuperuser(`DROP DATABASE ${name} WITH (FORCE)`),
  };
}
