// The local stand-in for S3-compatible storage: s3rver on loopback, open to browsers on any local page.
import S3rver from 's3rver';

const [directory, port] = process.argv.slice(2);
const cors = `<CORSConfiguration><CORSRule><AllowedOrigin>*</AllowedOrigin><AllowedMethod>GET</AllowedMethod><AllowedMethod>HEAD</AllowedMethod><AllowedMethod>PUT</AllowedMethod><AllowedHeader>*</AllowedHeader><ExposeHeader>ETag</ExposeHeader><MaxAgeSeconds>3000</MaxAgeSeconds></CORSRule></CORSConfiguration>`;

const server = new S3rver({
  address: '127.0.0.1',
  port: Number(port),
  directory,
  silent: true,
  resetOnClose: false,
  allowMismatchedSignatures: false,
  configureBuckets: [{ name: 'plimsoll', configs: [cors] }],
});
await server.run();
console.log(`storage on ${port}`);
for (const signal of ['SIGTERM', 'SIGINT']) process.on(signal, () => process.exit(0));
