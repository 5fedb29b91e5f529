import type { Knex } from 'knex';
import type { Scope } from '../scope.ts';

/** Holds a query to the scope's organisation: `.modify(within(scope, 'd.organisation_id'))`. The system sees all. */
export const within =
  (scope: Scope, column: string) =>
  (query: Knex.QueryBuilder): void => {
    if (scope.kind === 'member') query.where(column, scope.organisationId);
  };
