import { describe, expect, it } from 'vitest';
import { pickHeadline } from '../../../server/domain/headline';
import { parseRole } from '../../../server/domain/permissions';
import { withNonce } from '../../../server/routes/page-routes';
import { explain } from '../../../server/routes/sign-in-routes';
import { makeResult } from '../../http/fixtures';

describe('parseRole', () => {
  it.each([
    ['lead', 'lead'],
    ['guest', 'guest'],
    ['guest,analyst', 'analyst'],
    ['owner', null],
    ['Lead', null],
    ['', null],
  ])('%s -> %s', (stored, role) => {
    expect(parseRole(stored)).toBe(role);
  });
});

describe('pickHeadline', () => {
  const quantity = { value: 1, sigma: null, unit: 'um', method: 'fit', n: 5 };
  const file = (study: string, ids: string[]) => ({
    ...makeResult({}),
    study,
    quantities: Object.fromEntries(ids.map((id) => [id, quantity])),
  });
  it('takes what is asked first, then the order of the file', () => {
    const joint = file('joint-map', [
      'pairs',
      'width.x.plus.fit',
      'width.x.minus.moment',
      'width.x.minus.fit',
    ]);
    expect(pickHeadline(joint).map((entry) => entry.id)).toEqual([
      'width.x.minus.moment',
      'width.x.plus.fit',
      'pairs',
    ]);
  });
  it('takes a study it does not know as it comes, and an empty one', () => {
    expect(pickHeadline(file('new', ['a', 'b', 'c', 'd'])).map((entry) => entry.id)).toEqual(['a', 'b', 'c']);
    expect(pickHeadline(file('delay', []))).toEqual([]);
  });
});

describe('explain', () => {
  it.each([
    [401, '', 'wrong-sign-in', /do not belong together/],
    [400, '{"message":"Invalid password"}', 'bad-input', /refused: Invalid password\.$/],
    [400, '{"message":', 'bad-input', /refused: status 400\.$/],
    [400, '{"message":7}', 'bad-input', /refused: status 400\.$/],
    [500, '<html>', 'internal', /its log says why/],
  ])('%i %s -> %s', (status, text, code, sentence) => {
    const refusal = explain(status, text);
    expect(refusal.code).toBe(code);
    expect(refusal.message).toMatch(sentence);
  });
});

describe('withNonce', () => {
  it('replaces the placeholder or adds the element', () => {
    const want = '<head>\n    <meta name="csp-nonce" nonce="N">';
    expect(withNonce('<head><meta name="csp-nonce" nonce="" /><title>x</title>', 'N')).toBe(
      `${want}<title>x</title>`,
    );
    expect(withNonce('<head><title>x</title>', 'N')).toBe(`${want}<title>x</title>`);
  });
});
