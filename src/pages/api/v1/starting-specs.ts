import { endpoint } from '@/pages/_endpoint.ts';
import { listStartingSpecs } from '@/server/services/specs.ts';

export const GET = endpoint((_context, scope) => listStartingSpecs(scope));
