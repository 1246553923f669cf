/** Loads the demo into an empty database, and prints its sign-ins as JSON where there is one. */
import { config } from '#lib/server/config.ts';
import { closeDatabase, connection } from '#lib/server/db/client.ts';
import { SolveRunner } from '#lib/server/jobs/solve-runner.ts';
import { loadDemo } from '#lib/server/services/demo.ts';
import { runService } from './run-service.ts';

await runService('load-demo', async () => {
	config();
	const { db } = connection();
	const solver = new SolveRunner();
	const { signal } = new AbortController();
	const accounts = await loadDemo(db, (request) => solver.run(request, signal, () => {}));
	solver.stop();
	if (accounts) console.log(JSON.stringify(accounts));
	await closeDatabase();
});
