/** Works on background jobs until it is told to stop. */
import { config } from '#lib/server/config.ts';
import { closeDatabase, connection } from '#lib/server/db/client.ts';
import { registry } from '#lib/server/jobs/run-job.ts';
import { solveKind } from '#lib/server/jobs/solve-kind.ts';
import { SolveRunner } from '#lib/server/jobs/solve-runner.ts';
import { startWorker } from '#lib/server/jobs/worker.ts';
import { log } from '#lib/server/log.ts';
import { runService } from './run-service.ts';

/** Time to give a running job back before the process ends all the same. */
const STOP_GRACE_MS = 5000;

await runService('worker', async () => {
	const solver = new SolveRunner();
	const worker = await startWorker(
		connection(),
		config().DATABASE_URL,
		registry([solveKind(solver)])
	);
	log.info('worker ready');
	const stop = async () => {
		// With the database gone there is nobody to give the job back to: its lock is free as well.
		setTimeout(() => process.exit(1), STOP_GRACE_MS).unref();
		await worker.stop();
		solver.stop();
		await closeDatabase();
		process.exit(0);
	};
	process.once('SIGTERM', () => void stop());
	process.once('SIGINT', () => void stop());
	// Whoever started us is gone.
	process.once('disconnect', () => void stop());
});
