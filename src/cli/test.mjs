/**
 * `npm test`: installs what is missing, then runs every suite, cheapest first, each on a throw-away
 * database of its own. Goes on after a failure, and ends with the counts over all suites.
 */
import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { buildIfStale } from './build.mjs';
import { checkNode, installPackages, requireDebian } from './install.mjs';
import { runScript, STATE } from './paths.mjs';
import { run } from './run.mjs';

/** Suites whose own runner counts tests; the others count as one test each. */
const SUITES = /** @type {const} */ ([
	{ name: 'format and lint', script: 'lint', counts: false },
	{ name: 'types', script: 'check', counts: false },
	{ name: 'unit', script: 'test:unit', counts: true },
	{ name: 'server', script: 'test:server', counts: true },
	{ name: 'reference', script: 'test:reference', counts: true },
	{ name: 'browser', script: 'test:e2e', counts: true }
]);

/**
 * Runs one suite and counts its tests. A runner that ends badly without a failed test has failed.
 * @param {(typeof SUITES)[number]} suite
 */
async function runSuite({ name, script, counts }) {
	console.log(`\n── ${name} ──`);
	const file = join(STATE, 'test-counts.json');
	rmSync(file, { force: true });
	const begin = Date.now();
	const { code } = await run('npm', ['run', '--silent', script], {
		env: { ...process.env, COUNTS_FILE: file }
	});
	const seconds = Math.round((Date.now() - begin) / 1000);
	const counted = counts && existsSync(file) ? JSON.parse(readFileSync(file, 'utf8')) : null;
	const { passed, failed, skipped } = counted ?? {
		passed: !counts && code === 0 ? 1 : 0,
		failed: code === 0 && !counts ? 0 : 1,
		skipped: 0
	};
	return { name, seconds, passed, skipped, failed: code !== 0 && failed === 0 ? 1 : failed };
}

await runScript(async () => {
	checkNode();
	mkdirSync(STATE, { recursive: true });
	await installPackages();
	await requireDebian(['postgresql', 'chromium', 'ngspice', 'python3-scipy']);
	await buildIfStale();
	const results = [];
	for (const suite of SUITES) results.push(await runSuite(suite));
	console.log('');
	for (const { name, seconds, passed, failed } of results) {
		console.log(`${name}: ${passed} ok, ${failed} not ok, ${seconds} s`);
	}
	const sum = (/** @type {'passed' | 'failed' | 'skipped'} */ key) =>
		results.reduce((total, result) => total + result[key], 0);
	const skips = sum('skipped') > 0 ? `, ${sum('skipped')} skipped` : '';
	console.log(`${sum('passed')} passed, ${sum('failed')} failed${skips}`);
	process.exitCode = sum('failed') === 0 ? 0 : 1;
});
