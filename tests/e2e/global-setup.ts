import { buildIfStale } from '../../src/cli/build.mjs';
import { freePort, startThrowAwayPostgres } from '../../src/cli/postgres.mjs';
import { end } from '../../src/cli/run.mjs';
import {
	prepareDatabase,
	startProcess,
	untilReady,
	WEB_ENTRY,
	WORKER_ENTRY
} from '../../src/cli/services.mjs';

/** Starts the built product with its demo on a free port and a throw-away database. */
export default async function setUp(): Promise<() => Promise<void>> {
	// A product that runs already, with a fresh demo, may be tested as it is.
	if (process.env.MANYWEIR_TEST_ORIGIN) return () => Promise.resolve();
	await buildIfStale();
	const database = await startThrowAwayPostgres();
	const port = await freePort();
	const origin = `http://127.0.0.1:${port}`;
	const env = {
		...process.env,
		NODE_ENV: 'production',
		HOST: '127.0.0.1',
		PORT: String(port),
		ORIGIN: origin,
		DATABASE_URL: database.url,
		LOG_LEVEL: 'warn',
		MANYWEIR_MAIL_FOLDER: '.manyweir/test-mail'
	};
	await prepareDatabase(env);
	const worker = startProcess(WORKER_ENTRY, env);
	const web = startProcess(WEB_ENTRY, env);
	await untilReady(web);
	process.env.MANYWEIR_TEST_ORIGIN = origin;
	return async () => {
		await Promise.all([end(worker), end(web)]);
		await database.stop();
	};
}
