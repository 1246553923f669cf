/**
 * Bundles the worker, its solve threads and the service commands for Node. The framework's build
 * makes the web server only, and empties build/ first: this runs after it.
 */
import { build } from 'esbuild';
import { join } from 'node:path';
import { ROOT } from './paths.mjs';

export const WORKER_FOLDER = join(ROOT, 'build', 'worker');

/** @param {string} [outdir] */
export async function buildWorker(outdir = WORKER_FOLDER) {
	await build({
		absWorkingDir: ROOT,
		entryPoints: [
			'src/cli/worker.ts',
			'src/cli/migrate.ts',
			'src/cli/load-demo.ts',
			'src/lib/server/jobs/solve-thread.ts',
			'src/lib/threads/second-thread.js'
		],
		entryNames: '[name]',
		outdir,
		bundle: true,
		platform: 'node',
		target: 'node20',
		format: 'esm',
		packages: 'external',
		sourcemap: true,
		logLevel: 'warning'
	});
}

if (process.argv[1] === import.meta.filename) await buildWorker();
