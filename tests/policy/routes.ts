/** The site's routes as its files say them. */
import { readdirSync, readFileSync } from 'node:fs';
import { join, relative, sep } from 'node:path';
import { fileURLToPath } from 'node:url';

const pages = fileURLToPath(new URL('../../src/pages', import.meta.url));

export interface RouteFile {
  /** As Astro writes it: '/deliverables/[id]'. */
  pattern: string;
  file: string;
  isPage: boolean;
  /** Methods that an endpoint exports; a page answers GET, and POST where it reads a form. */
  methods: string[];
}

const methodNames = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE', 'HEAD', 'OPTIONS', 'ALL'];

function methodsOf(path: string, isPage: boolean): string[] {
  const source = readFileSync(path, 'utf8');
  if (isPage) return /request\.method\s*[!=]==\s*'POST'/.test(source) ? ['GET', 'POST'] : ['GET'];
  return methodNames.filter((name) =>
    new RegExp(
      `export\\s+(const|let|var|async function|function)\\s+${name}\\b|export\\s*\\{[^}]*\\b${name}\\b`,
    ).test(source),
  );
}

/** Every page and endpoint under src/pages. Names that begin with an underscore are no routes in Astro. */
export function routeFiles(): RouteFile[] {
  return readdirSync(pages, { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile() && /\.(astro|ts|js|md|mdx|html)$/.test(entry.name))
    .map((entry) => join(entry.parentPath, entry.name))
    .filter(
      (path) =>
        !relative(pages, path)
          .split(sep)
          .some((part) => part.startsWith('_')),
    )
    .map((path) => {
      const file = relative(pages, path).split(sep).join('/');
      const isPage = file.endsWith('.astro');
      const bare = file.replace(/\.(astro|ts|js|md|mdx|html)$/, '').replace(/(^|\/)index$/, '');
      return { pattern: `/${bare}`, file, isPage, methods: methodsOf(path, isPage) };
    });
}
