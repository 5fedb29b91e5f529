// For knex's own command line (npm run migrate). The owner's role migrates; the application's role could not.
import type { Knex } from 'knex';

const connection = process.env.MIGRATION_DATABASE_URL;
if (!connection)
  throw new Error('MIGRATION_DATABASE_URL is missing: the address of the database as its owner.');

const settings: Knex.Config = {
  client: 'pg',
  connection,
  migrations: { directory: './migrations', extension: 'ts', loadExtensions: ['.ts'] },
};
export default settings;
