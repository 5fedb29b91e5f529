import { endpoint } from '@/pages/_endpoint.ts';
import { listSuppliers } from '@/server/services/channels.ts';

export const GET = endpoint((_context, scope) => listSuppliers(scope));
