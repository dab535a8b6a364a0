/** `tsx fake-services/stripe/main.ts --port 4010 --data .data/payments [--key …] [--seed …] [--public-url …]` */
import { parseArgs } from 'node:util';
import { startPaymentService } from './server.ts';

const { values } = parseArgs({
  options: {
    port: { type: 'string', default: '4010' },
    data: { type: 'string', default: '.data/payments' },
    key: { type: 'string' },
    seed: { type: 'string' },
    'public-url': { type: 'string' },
  },
});

try {
  const running = await startPaymentService({
    port: Number(values.port),
    dataDir: values.data,
    ...(values.key === undefined ? {} : { apiKey: values.key }),
    ...(values.seed === undefined ? {} : { seed: values.seed }),
    ...(values['public-url'] === undefined ? {} : { publicUrl: values['public-url'] }),
  });
  process.stdout.write(`ready payments ${running.url}\n`);
  for (const signal of ['SIGTERM', 'SIGINT'] as const) {
    process.once(signal, () => void running.close().then(() => process.exit(0)));
  }
} catch (error) {
  process.stderr.write(`payment stand-in: ${error instanceof Error ? error.message : String(error)}\n`);
  process.exitCode = 1;
}
