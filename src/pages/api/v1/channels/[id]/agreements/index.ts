import { createAgreementSchema } from '@/domain/api/specs.ts';
import { body, endpoint, idParam } from '@/pages/_endpoint.ts';
import { makeAgreement } from '@/server/services/channels.ts';

export const POST = endpoint(async (context, scope) =>
  makeAgreement(scope, idParam(context), (await body(context, createAgreementSchema)).supplierId),
);
