import { body, endpoint, idParam } from '../../../../_endpoint.ts';
import { noteSchema } from '@/domain/api/submissions.ts';
import { addNote } from '@/server/services/submissions.ts';

/** Adds a note that both sides read; answers it. */
export const POST = endpoint(async (context, scope) =>
  addNote(scope, idParam(context), await body(context, noteSchema)),
);
