// What a bench measured of a file before it was sent: held against the service's own figures when those are written.
import type { Knex } from 'knex';

export async function up(knex: Knex): Promise<void> {
  await knex.raw('ALTER TABLE deliverables ADD COLUMN bench_figures jsonb');
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw('ALTER TABLE deliverables DROP COLUMN bench_figures');
}
