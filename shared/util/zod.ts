/**
 * The one door to zod. Its compiled parsers use `Function`, which the content security policy forbids, so the
 * interpreter is chosen before any schema is made.
 */
import { z } from 'zod';

z.config({ jitless: true });

export { z };
