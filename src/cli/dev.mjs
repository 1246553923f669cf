/** `npm run dev`: the product from its sources, with a database of its own and one worker. */
import { spawn } from 'node:child_process';
import { join } from 'node:path';
import { buildWorker } from './build-worker.mjs';
import { checkNode, requireDebian } from './install.mjs';
import { ROOT, runScript, STATE } from './paths.mjs';
import { startPostgres } from './postgres.mjs';
import { end } from './run.mjs';
import { prepareDatabase, startProcess, WORKER_ENTRY } from './services.mjs';

await runScript(async () => {
	checkNode();
	const port = process.env.PORT ?? '4310';
	if (!process.env.DATABASE_URL) await requireDebian(['postgresql']);
	const database = process.env.DATABASE_URL ? null : await startPostgres(join(STATE, 'database'));
	const env = {
		...process.env,
		PORT: port,
		ORIGIN: process.env.ORIGIN ?? `http://127.0.0.1:${port}`,
		DATABASE_URL: process.env.DATABASE_URL ?? database?.url
	};
	await buildWorker();
	const demo = await prepareDatabase(env);
	if (demo)
		console.log(`Demo: ${demo.people.map(({ email }) => email).join(', ')}; "${demo.password}"`);
	const worker = startProcess(WORKER_ENTRY, env);
	const vite = spawn(
		process.execPath,
		[join(ROOT, 'node_modules/vite/bin/vite.js'), 'dev', '--host', '127.0.0.1', '--port', port],
		{ cwd: ROOT, env, stdio: ['ignore', 'inherit', 'inherit'] }
	);
	const stop = async () => {
		await Promise.all([end(worker), end(vite)]);
		await database?.stop();
		process.exit(0);
	};
	process.once('SIGINT', () => void stop());
	process.once('SIGTERM', () => void stop());
	vite.once('exit', () => void stop());
});
