/** Answer of `submit` ($lib/server/form) to a form that was not accepted. */
export interface FormFailure {
  form: string;
  values: Record<string, string | string[]>;
  errors: Record<string, string>;
  error: string | null;
  cure: string | null;
  details: unknown;
}

/** Answer to a form that was. */
export interface FormSuccess {
  form: string;
  done: true;
  /** what was done, where it is worth a sentence */
  said?: string;
}

const holds = (answer: unknown, key: string): answer is { form: string } =>
  typeof answer === 'object' && answer !== null && key in answer && 'form' in answer;

/** The failure in a page's `form`, if it is one, and of the form with that name where a name is given. */
export function failureOf(answer: unknown, name?: string): FormFailure | null {
  return holds(answer, 'errors') && (!name || answer.form === name) ? (answer as FormFailure) : null;
}

/** The success in a page's `form`, likewise. */
export function successOf(answer: unknown, name?: string): FormSuccess | null {
  return holds(answer, 'done') && (!name || answer.form === name) ? (answer as FormSuccess) : null;
}
