import { api } from '$lib/server/edge';
import { handleTransfer } from '$lib/server/services/upload-protocol';
import type { RequestHandler } from './$types';

const transfer: RequestHandler = ({ request, locals, params }) =>
  api(() => handleTransfer(locals.user, request, params.path || null));

export { transfer as DELETE, transfer as HEAD, transfer as OPTIONS, transfer as PATCH, transfer as POST };
