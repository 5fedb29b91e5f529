/// <reference types="astro/client" />
declare namespace App {
  interface Locals {
    /** Who is asking; `null` when nobody is signed in. Set by middleware. */
    scope: import('./server/scope.ts').MemberScope | null;
  }
}
