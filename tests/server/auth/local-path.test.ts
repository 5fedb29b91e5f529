import { describe, expect, it } from 'vitest';
import { localPath } from '../../../src/server/auth/local-path.ts';

describe('where sign-in may lead', () => {
  it.each(['/deliverables', '/review/4f?state=rejected#rules', '/'])(
    'goes to a path of this site: %s',
    (path) => {
      expect(localPath(path)).toBe(path);
    },
  );

  // Ways out of a site that a browser would take (WHATWG URL: backslashes, two slashes, control characters).
  it.each([
    'https://elsewhere.example/',
    '//elsewhere.example/',
    '/\\elsewhere.example/',
    '/\t/elsewhere.example/',
    '/..//elsewhere.example',
    'javascript:alert(1)',
    'deliverables',
    '',
    null,
    undefined,
  ])('goes nowhere for %s', (path) => {
    expect(localPath(path)).toBeNull();
  });

  it.each(['/sign-in', '/sign-in?callbackUrl=/x', '/sign-out', '/api/v1/me'])(
    'does not go round in a circle or to an answer for machines: %s',
    (path) => {
      expect(localPath(path)).toBeNull();
    },
  );
});
