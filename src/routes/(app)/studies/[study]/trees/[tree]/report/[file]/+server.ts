import { api } from '$lib/server/edge';
import { downloadReport } from '$lib/server/services/report-download';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = ({ locals, params, url }) =>
  api(() => downloadReport(locals.user, params.tree, params.study, params.file, url.searchParams));
