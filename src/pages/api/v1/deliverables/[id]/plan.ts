import { body, endpoint, idParam } from '../../../../_endpoint.ts';
import { setPlanSchema } from '@/domain/api/deliverables.ts';
import { setMeasuringPlan } from '@/server/services/measuring-plans.ts';

/** Has the deliverable measured another way. */
export const PUT = endpoint(async (context, scope) =>
  setMeasuringPlan(scope, idParam(context), await body(context, setPlanSchema)),
);
