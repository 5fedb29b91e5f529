import { defineConfig, passthroughImageService } from 'astro/config';
import node from '@astrojs/node';
import react from '@astrojs/react';
import auth from 'auth-astro';
import tailwindcss from '@tailwindcss/vite';

// Nothing of a deployment is baked in here: any Host is accepted by the build, and workers/web.ts checks it
// (and writes the content security policy) at run time from the environment.
export default defineConfig({
  output: 'server',
  adapter: node({ mode: 'standalone' }),
  integrations: [react(), auth({ configFile: './src/auth.config' })],
  security: { checkOrigin: true, allowedDomains: [{}] },
  image: { service: passthroughImageService() },
  devToolbar: { enabled: false },
  vite: {
    plugins: [tailwindcss()],
    build: { assetsInlineLimit: 0 },
    ssr: { external: ['@node-rs/argon2', 'knex', 'pg', 'bullmq', 'ioredis', 'pino', 'nodemailer'] },
  },
});
