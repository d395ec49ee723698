import { z } from 'zod';
import { api, parse } from '$lib/server/edge';
import { ionDetail } from '$lib/server/services/ion-detail';
import type { RequestHandler } from './$types';

const ionId = z.coerce.number().int().positive();

export const GET: RequestHandler = ({ locals, params }) =>
  api(async () => ionDetail(locals.user, params.tree, parse(ionId, params.ion)));
