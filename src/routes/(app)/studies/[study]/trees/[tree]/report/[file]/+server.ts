import { reportOptions } from '$lib/review/report/options';
import { api } from '$lib/server/edge';
import { reportDownload, reportFile } from '$lib/server/report/files';
import { reportOf } from '$lib/server/services/report';
import type { RequestHandler } from './$types';

export const GET: RequestHandler = ({ locals, params, url }) =>
  api(async () => {
    const file = reportFile(params.file);
    return reportDownload(
      await reportOf(locals.user, params.tree, params.study, reportOptions(url.searchParams)),
      file
    );
  });
