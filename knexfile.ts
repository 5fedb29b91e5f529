import type { Knex } from 'knex';
import { config } from './src/server/config.ts';

const { MIGRATION_DATABASE_URL } = config();
if (!MIGRATION_DATABASE_URL)
  throw new Error('Migrations need MIGRATION_DATABASE_URL: the address with the owner’s role.');

const settings: Knex.Config = {
  client: 'pg',
  connection: MIGRATION_DATABASE_URL,
  pool: { min: 0, max: 2 },
  migrations: {
    directory: './migrations',
    extension: 'ts',
    loadExtensions: ['.ts'],
    tableName: 'knex_migrations',
  },
};
export default settings;
