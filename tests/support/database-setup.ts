/**
 * Before the server's tests: one throw-away database server, a migrated template database on it,
 * and the worker's bundle, which tests start as processes of their own.
 */
import { join } from 'node:path';
import type { TestProject } from 'vitest/node';
import { migrateDatabase } from '#lib/server/db/migrate.ts';
import { buildWorker } from '../../src/cli/build-worker.mjs';
import { STATE } from '../../src/cli/paths.mjs';
import { startThrowAwayPostgres } from '../../src/cli/postgres.mjs';

declare module 'vitest' {
	interface ProvidedContext {
		/** Address of the template database; every test file clones it. */
		templateDatabase: string;
		/** Folder with the bundled worker and solve thread. */
		workerFolder: string;
	}
}

export default async function setup(project: TestProject): Promise<() => Promise<void>> {
	const server = await startThrowAwayPostgres();
	try {
		await migrateDatabase(server.url, 'drizzle');
		// Inside the project, so that the bundle finds its packages.
		const workerFolder = join(STATE, 'test-worker');
		await buildWorker(workerFolder);
		project.provide('templateDatabase', server.url);
		project.provide('workerFolder', workerFolder);
	} catch (error) {
		await server.stop();
		throw error;
	}
	return () => server.stop();
}
