import { reportOptions } from '$lib/review/report/options';
import type { Actor } from '../auth/authorize';
import { reportDownload, reportFile } from '../report/files';
import { reportOf } from './report';

/**
 * One file of a tree's report, as the person may read it.
 * @param file name of the file as in the address, e.g. "report.pdf"
 * @throws ServiceError not-found, forbidden, unauthenticated
 */
export async function downloadReport(
  actor: Actor | null,
  treeId: string,
  studyId: string,
  file: string,
  choices: URLSearchParams
): Promise<Response> {
  const printed = await reportOf(actor, treeId, studyId, reportOptions(choices));
  return reportDownload(printed, reportFile(file));
}
