import { endpoint, idParam } from '@/pages/_endpoint.ts';
import { endAgreementWith } from '@/server/services/channels.ts';

export const DELETE = endpoint(async (context, scope) =>
  endAgreementWith(scope, idParam(context), idParam(context, 'agreementId')),
);
