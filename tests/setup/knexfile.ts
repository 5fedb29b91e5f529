import type { Knex } from 'knex';

const settings: Knex.Config = {
  client: 'pg',
  connection: process.env.MIGRATION_DATABASE_URL,
  migrations: { directory: '../../migrations', extension: 'ts', loadExtensions: ['.ts'] },
};
export default settings;
