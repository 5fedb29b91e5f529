import { saveDraftSchema } from '@/domain/api/specs.ts';
import { body, endpoint, idParam } from '@/pages/_endpoint.ts';
import { discardDraft, saveDraft } from '@/server/services/specs.ts';

export const PUT = endpoint(async (context, scope) =>
  saveDraft(scope, idParam(context), await body(context, saveDraftSchema)),
);

export const DELETE = endpoint(async (context, scope) => discardDraft(scope, idParam(context)));
