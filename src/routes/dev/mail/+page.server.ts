import { page } from '$lib/server/edge';
import { caughtMails } from '$lib/server/mail/caught';
import type { PageServerLoad } from './$types';

// Exists only beside the local mail catcher; the service answers 404 everywhere else.
export const load: PageServerLoad = ({ url }) =>
  page(async () => {
    const mails = await caughtMails();
    const chosen = url.searchParams.get('mail');
    return { mails, chosen: mails.find((mail) => mail.id === chosen) ?? mails[0] ?? null };
  });
