import { setNonce } from 'get-nonce';

/**
 * Dialogs and menus make style sheets of their own; the content policy lets them in by this nonce. Imported before
 * anything that could make one. The development server has no policy and gives none.
 */
const nonce = document.querySelector<HTMLMetaElement>('meta[name="csp-nonce"]')?.nonce;
if (nonce) setNonce(nonce);
