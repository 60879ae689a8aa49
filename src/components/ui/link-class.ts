/** Links inside text and rows of actions. */
export const textLink = 'text-text underline decoration-strong underline-offset-4 hover:decoration-text';
