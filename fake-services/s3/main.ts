/** `tsx fake-services/s3/main.ts --port 4020 --data .data/objects --origin http://localhost:3000 …` */
import { parseArgs } from 'node:util';
import { startObjectStore } from './server.ts';

const { values } = parseArgs({
  options: {
    port: { type: 'string', default: '4020' },
    data: { type: 'string', default: '.data/objects' },
    bucket: { type: 'string', multiple: true, default: ['coilyard'] },
    origin: { type: 'string', multiple: true, default: ['http://localhost:3000'] },
    region: { type: 'string', default: 'eu-central-1' },
    'access-key-id': { type: 'string', default: 'COILYARDDEMOKEY' },
    'secret-access-key': { type: 'string', default: 'coilyard-demo-object-store-secret' },
  },
});

try {
  const running = await startObjectStore({
    port: Number(values.port),
    dataDir: values.data,
    buckets: values.bucket,
    corsOrigins: values.origin,
    credentials: {
      region: values.region,
      accessKeyId: values['access-key-id'],
      secretAccessKey: values['secret-access-key'],
    },
  });
  process.stdout.write(`ready objects ${running.url}\n`);
  for (const signal of ['SIGTERM', 'SIGINT'] as const) {
    process.once(signal, () => void running.close().then(() => process.exit(0)));
  }
} catch (error) {
  process.stderr.write(`object store stand-in: ${error instanceof Error ? error.message : String(error)}\n`);
  process.exitCode = 1;
}
