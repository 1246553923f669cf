/**
 * `npm start`: from a fresh clone to the running product. Plain JavaScript without packages, since
 * it runs before anything is installed.
 */
import { existsSync, mkdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { buildIfStale } from './build.mjs';
import { checkNode, installPackages, requireDebian } from './install.mjs';
import { runScript, Refusal, STATE } from './paths.mjs';
import { startPostgres } from './postgres.mjs';
import { end } from './run.mjs';
import {
	prepareDatabase,
	requireFreePort,
	startProcess,
	untilReady,
	WEB_ENTRY,
	WORKER_ENTRY
} from './services.mjs';

const LOCK = join(STATE, 'start.pid');
/** A part that dies is started again after this long, doubled each time it dies soon after. */
const RESTART_MS = 500;
const LONGEST_RESTART_MS = 30_000;

/** Refuses to run twice in one folder. */
function takeLock() {
	mkdirSync(STATE, { recursive: true });
	if (existsSync(LOCK)) {
		const pid = readFileSync(LOCK, 'utf8').trim();
		const commandLine = join('/proc', pid, 'cmdline');
		if (pid && existsSync(commandLine) && readFileSync(commandLine, 'utf8').includes('start.mjs')) {
			throw new Refusal(`Manyweir already runs from this folder (process ${pid}). Stop it first.`);
		}
	}
	writeFileSync(LOCK, String(process.pid));
}

/** @type {import('node:child_process').ChildProcess[]} */
const parts = [];
let isStopping = false;

/**
 * Keeps a part running: starts it again when it dies.
 * @param {string} name
 * @param {string} file
 * @param {NodeJS.ProcessEnv} env
 */
function keepRunning(name, file, env) {
	let delay = RESTART_MS;
	const launch = () => {
		const child = startProcess(file, env);
		const begin = Date.now();
		parts.push(child);
		child.once('exit', (code, signal) => {
			parts.splice(parts.indexOf(child), 1);
			if (isStopping) return;
			if (Date.now() - begin > LONGEST_RESTART_MS) delay = RESTART_MS;
			console.error(`The ${name} ended (${signal ?? code}); it starts again in ${delay / 1000} s.`);
			setTimeout(() => !isStopping && launch(), delay);
			delay = Math.min(delay * 2, LONGEST_RESTART_MS);
		});
		return child;
	};
	return launch();
}

await runScript(async () => {
	checkNode();
	takeLock();
	const port = Number(process.env.PORT ?? 4310);
	const host = process.env.HOST ?? '127.0.0.1';
	await requireFreePort(host, port);
	await installPackages();
	if (!process.env.DATABASE_URL) await requireDebian(['postgresql']);
	await buildIfStale();
	const database = process.env.DATABASE_URL ? null : await startPostgres(join(STATE, 'database'));
	const env = {
		...process.env,
		NODE_ENV: 'production',
		HOST: host,
		PORT: String(port),
		ORIGIN: process.env.ORIGIN ?? `http://127.0.0.1:${port}`,
		DATABASE_URL: process.env.DATABASE_URL ?? database?.url,
		LOG_LEVEL: process.env.LOG_LEVEL ?? 'warn'
	};
	const stop = async (/** @type {number} */ code) => {
		if (isStopping) return;
		isStopping = true;
		await Promise.all(parts.map((part) => end(part)));
		await database?.stop();
		rmSync(LOCK, { force: true });
		process.exit(code);
	};
	process.on('SIGINT', () => void stop(0));
	process.on('SIGTERM', () => void stop(0));
	try {
		const demo = await prepareDatabase(env);
		keepRunning('worker', WORKER_ENTRY, env);
		await untilReady(keepRunning('web server', WEB_ENTRY, env));
		console.log(`\nManyweir runs at ${env.ORIGIN}`);
		if (demo) {
			console.log(`\nDemo sign-ins, all with the password "${demo.password}":`);
			for (const { email, name, role } of demo.people) {
				console.log(`  ${email.padEnd(24)} ${name}, ${role}`);
			}
		}
		console.log('\nCtrl-C stops it.');
	} catch (error) {
		console.error(error instanceof Refusal ? error.message : error);
		await stop(1);
	}
});
