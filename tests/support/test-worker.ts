/** A worker process for tests that kill one: the product's worker with the test's kind of work. */
import { config } from '#lib/server/config.ts';
import { connection } from '#lib/server/db/client.ts';
import { registry } from '#lib/server/jobs/run-job.ts';
import { startWorker } from '#lib/server/jobs/worker.ts';
import { testKind } from './jobs.ts';

const worker = await startWorker(
	connection(),
	config().DATABASE_URL,
	registry([testKind(connection())])
);
process.once('SIGTERM', () => void worker.stop().then(() => process.exit(0)));
