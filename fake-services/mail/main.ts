/** `tsx fake-services/mail/main.ts --port 4030 --web 4031 --data .data/mail` */
import { parseArgs } from 'node:util';
import { startMailServer } from './server.ts';

const { values } = parseArgs({
  options: {
    port: { type: 'string', default: '4030' },
    web: { type: 'string', default: '4031' },
    data: { type: 'string' },
  },
});

try {
  const running = await startMailServer({
    smtpPort: Number(values.port),
    webPort: Number(values.web),
    ...(values.data === undefined ? {} : { dataDir: values.data }),
  });
  process.stdout.write(`ready mail ${running.url}\n`);
  for (const signal of ['SIGTERM', 'SIGINT'] as const) {
    process.once(signal, () => void running.close().then(() => process.exit(0)));
  }
} catch (error) {
  process.stderr.write(`mail stand-in: ${error instanceof Error ? error.message : String(error)}\n`);
  process.exitCode = 1;
}
