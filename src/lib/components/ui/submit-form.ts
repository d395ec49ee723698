import { enhance } from '$app/forms';
import type { SubmitFunction } from '@sveltejs/kit';
import { tick } from 'svelte';

interface SubmitOptions {
  /** empty the fields after success */
  reset?: boolean;
  onbusy?: (busy: boolean) => void;
}

async function focusFirstError(form: HTMLFormElement): Promise<void> {
  await tick();
  form.querySelector<HTMLElement>('[aria-invalid="true"]')?.focus();
}

/**
 * Sends a form without leaving the page, and takes the focus to the first wrong field. Without JavaScript the form
 * works as a plain one. A second press while the first is under way is ignored.
 */
export function submitForm(form: HTMLFormElement, options: SubmitOptions = {}) {
  let busy = false;
  const submit: SubmitFunction = ({ cancel }) => {
    if (busy) return cancel();
    busy = true;
    options.onbusy?.(true);
    return async ({ result, update }) => {
      await update({ reset: options.reset ?? false });
      busy = false;
      options.onbusy?.(false);
      if (result.type === 'failure') await focusFirstError(form);
    };
  };
  return enhance(form, submit);
}
