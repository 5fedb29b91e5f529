import { defineConfig, passthroughImageService } from 'astro/config';
import node from '@astrojs/node';
import react from '@astrojs/react';
import auth from 'auth-astro';
import tailwindcss from '@tailwindcss/vite';

// Nothing of a deployment is baked in here: any Host is accepted by the build and workers/web.ts checks it at run time; the
// content security policy holds the build's script hashes, and src/middleware.ts adds the storage's address to it.
export default defineConfig({
  output: 'server',
  adapter: node({ mode: 'standalone' }),
  integrations: [react(), auth({ configFile: './src/auth.config' })],
  security: { checkOrigin: true, allowedDomains: [{}] },
  image: { service: passthroughImageService() },
  experimental: {
    csp: {
      directives: [
        "default-src 'self'",
        "img-src 'self' data:",
        "font-src 'self'",
        "base-uri 'none'",
        "form-action 'self'",
        "object-src 'none'",
        "frame-ancestors 'none'",
        "worker-src 'self'",
      ],
      // The browser's hashing is WebAssembly.
      scriptDirective: { resources: ["'self'", "'wasm-unsafe-eval'"] },
    },
  },
  devToolbar: { enabled: false },
  vite: {
    plugins: [tailwindcss()],
    build: { assetsInlineLimit: 0 },
    ssr: { external: ['@node-rs/argon2', 'knex', 'pg', 'bullmq', 'ioredis', 'pino', 'nodemailer'] },
  },
});
