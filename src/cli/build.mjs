import { existsSync, readdirSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { Refusal, ROOT } from './paths.mjs';
import { lastLine } from './install.mjs';
import { run } from './run.mjs';

const STAMP = join(ROOT, 'build', '.stamp');
const SOURCES = [
	'src',
	'static',
	'svelte.config.js',
	'vite.config.ts',
	'tailwind.config.ts',
	'package.json',
	'package-lock.json'
];

/** Newest change below a path, ms; tests do not count. @param {string} path @returns {number} */
function newestChange(path) {
	const stats = statSync(path);
	if (!stats.isDirectory()) return /\.test\.[jt]s$/.test(path) ? 0 : stats.mtimeMs;
	return Math.max(
		stats.mtimeMs,
		...readdirSync(path).map((name) => newestChange(join(path, name)))
	);
}

/** Whether the build is there and newer than everything it is made from. */
export function isBuilt() {
	if (!existsSync(STAMP)) return false;
	const built = statSync(STAMP).mtimeMs;
	return SOURCES.every((source) => newestChange(join(ROOT, source)) <= built);
}

/** Builds web server and worker where the build is older than the sources. */
export async function buildIfStale() {
	if (isBuilt()) return;
	console.log('Building …');
	const { code, output } = await run('npm', ['run', '--silent', 'build'], { quiet: true });
	if (code !== 0) throw new Refusal(`The build failed: ${lastLine(output)}\n${output}`);
	writeFileSync(STAMP, '');
}
