/**
 * A PostgreSQL server of the project's own, on loopback, from Debian's binaries. As root it runs as
 * the `postgres` user, since the server refuses to run as root.
 */
import { spawn, spawnSync } from 'node:child_process';
import {
	accessSync,
	chownSync,
	closeSync,
	constants,
	existsSync,
	mkdirSync,
	openSync,
	readdirSync,
	readFileSync,
	readlinkSync,
	rmSync,
	statSync
} from 'node:fs';
import { createServer } from 'node:net';
import { tmpdir } from 'node:os';
import { createHash } from 'node:crypto';
import { dirname, join } from 'node:path';
import { postgresBinaries } from './install.mjs';
import { Refusal } from './paths.mjs';

const DATABASE_USER = 'manyweir';
const READY_TRIES = 150;
const TRY_MS = 200;

/** @param {number} ms */
const wait = (ms) => new Promise((resolve) => setTimeout(resolve, ms));

/** User and group that the server runs as: the postgres user where we are root. */
function serverUser() {
	if (process.getuid?.() !== 0) return {};
	const line = readFileSync('/etc/passwd', 'utf8')
		.split('\n')
		.find((entry) => entry.startsWith('postgres:'));
	if (!line)
		throw new Refusal('There is no user "postgres": install the Debian package postgresql.');
	const [, , uid, gid] = line.split(':');
	return { uid: Number(uid), gid: Number(gid) };
}

/** Whether the server's user can pass through every folder above a path. @param {string} path */
function isReachable(path) {
	const { uid } = serverUser();
	for (let folder = dirname(path); ; folder = dirname(folder)) {
		if (uid === undefined) {
			try {
				accessSync(folder, constants.X_OK);
			} catch {
				return false;
			}
		} else if ((statSync(folder).mode & 0o001) === 0 && statSync(folder).uid !== uid) {
			return false;
		}
		if (folder === dirname(folder)) return true;
	}
}

/**
 * Folder for a cluster: the wanted one, or one of its own under the system's temporary folder where
 * the server's user cannot reach the project.
 * @param {string} wanted
 */
function reachableFolder(wanted) {
	if (isReachable(wanted)) return wanted;
	const name = createHash('sha256').update(wanted).digest('hex').slice(0, 16);
	const fallback = join(tmpdir(), `manyweir-${name}`);
	console.log(`The database server cannot reach ${dirname(wanted)}: its data goes to ${fallback}.`);
	return fallback;
}

/** @returns {Promise<number>} */
export function freePort() {
	return new Promise((resolve, reject) => {
		const server = createServer();
		server.on('error', reject);
		server.listen(0, '127.0.0.1', () => {
			const address = server.address();
			server.close(() => resolve(typeof address === 'object' && address ? address.port : 0));
		});
	});
}

/** Processes of a server that was killed can outlive it and hold its memory: end them. @param {string} data */
function endOrphans(data) {
	for (const pid of readdirSync('/proc').filter((name) => /^\d+$/.test(name))) {
		try {
			const isOurs =
				readlinkSync(`/proc/${pid}/cwd`) === data &&
				/\/postgres/.test(readlinkSync(`/proc/${pid}/exe`));
			if (isOurs) process.kill(Number(pid), 'SIGQUIT');
		} catch {
			// Gone, or not ours to look at.
		}
	}
}

/** @param {string} folder @param {string} name */
function logTail(folder, name) {
	const path = join(folder, name);
	return existsSync(path)
		? readFileSync(path, 'utf8').trim().split('\n').slice(-3).join(' | ')
		: '';
}

/**
 * @typedef {object} PostgresServer
 * @property {string} url of the product's database
 * @property {number} port
 * @property {number} pid
 * @property {() => Promise<void>} stop ends connections and the server, cleanly
 */

/**
 * Starts a server with its data in `wanted`, creating the cluster where there is none. Recovers
 * after a kill: leftover processes are ended, a stale lock file is waited out.
 * @param {string} wanted
 * @param {{ isThrowAway?: boolean }} [options] without flushing to disk, for tests
 * @returns {Promise<PostgresServer>}
 */
export async function startPostgres(wanted, { isThrowAway = false } = {}) {
	const binaries = postgresBinaries();
	if (!binaries) throw new Refusal('There are no PostgreSQL server binaries: install postgresql.');
	const user = serverUser();
	mkdirSync(dirname(wanted), { recursive: true });
	const folder = reachableFolder(wanted);
	mkdirSync(folder, { recursive: true, mode: 0o700 });
	if (user.uid !== undefined) chownSync(folder, user.uid, user.gid);
	const data = join(folder, 'data');
	if (!existsSync(join(data, 'PG_VERSION'))) createCluster(binaries, user, data, isThrowAway);
	const port = await freePort();
	const flags = ['-D', data, '-p', String(port)];
	const settings = [
		'listen_addresses=127.0.0.1',
		'unix_socket_directories=',
		'max_connections=200'
	];
	if (isThrowAway) settings.push('fsync=off', 'synchronous_commit=off', 'full_page_writes=off');
	for (const setting of settings) flags.push('-c', setting);
	let server = launch(binaries, user, folder, flags);
	for (let attempt = 0; attempt < READY_TRIES; attempt++) {
		if (answers(binaries, port)) {
			const pid = server.pid ?? 0;
			ensureDatabase(binaries, port);
			return {
				url: `postgres://${DATABASE_USER}@127.0.0.1:${port}/${DATABASE_USER}`,
				port,
				pid,
				stop: () => stopServer(server)
			};
		}
		if (server.exitCode !== null) {
			// A killed predecessor's lock file or shared memory: end what is left of it, try again.
			endOrphans(data);
			await wait(300);
			server = launch(binaries, user, folder, flags);
		}
		await wait(TRY_MS);
	}
	server.kill('SIGQUIT');
	throw new Refusal(`The database server does not start: ${logTail(folder, 'postgres.log')}`);
}

/** @param {string} binaries @param {{uid?: number, gid?: number}} user @param {string} data @param {boolean} isThrowAway */
function createCluster(binaries, user, data, isThrowAway) {
	// Half of a cluster from an interrupted start would never run.
	rmSync(data, { recursive: true, force: true });
	const args = [
		'-D',
		data,
		'-U',
		DATABASE_USER,
		'--auth=trust',
		'--encoding=UTF8',
		'--locale=C.UTF-8'
	];
	if (isThrowAway) args.push('--no-sync');
	const made = spawnSync(join(binaries, 'initdb'), args, { ...user, cwd: '/', encoding: 'utf8' });
	if (made.status === 0) return;
	rmSync(data, { recursive: true, force: true });
	const said = (made.stderr ?? '').trim().split('\n');
	// The last line only tells what was cleared away; the reason stands before it.
	const reason = said.find((line) => /could not|No space|FATAL|error/i.test(line)) ?? said.at(-1);
	throw new Refusal(`The database cannot be created: ${reason || made.error?.message}`);
}

/** @param {string} binaries @param {{uid?: number, gid?: number}} user @param {string} folder @param {string[]} flags */
function launch(binaries, user, folder, flags) {
	const log = openSync(join(folder, 'postgres.log'), 'a');
	const server = spawn(join(binaries, 'postgres'), flags, {
		...user,
		cwd: '/',
		// Its own group: Ctrl-C reaches us, and we stop it after those who use it.
		detached: true,
		stdio: ['ignore', log, log]
	});
	closeSync(log);
	server.on('error', () => {});
	return server;
}

/** Whether the server takes connections: a process id alone can be a zombie's. @param {string} binaries @param {number} port */
function answers(binaries, port) {
	const args = ['-h', '127.0.0.1', '-p', String(port), '-U', DATABASE_USER, '-d', 'postgres', '-q'];
	return spawnSync(join(binaries, 'pg_isready'), args).status === 0;
}

/** @param {string} binaries @param {number} port */
function ensureDatabase(binaries, port) {
	const args = ['-h', '127.0.0.1', '-p', String(port), '-U', DATABASE_USER];
	const made = spawnSync(join(binaries, 'createdb'), [...args, DATABASE_USER], {
		encoding: 'utf8'
	});
	if (made.status !== 0 && !/already exists/.test(made.stderr)) {
		throw new Refusal(`The database cannot be created: ${made.stderr.trim()}`);
	}
}

/** @param {import('node:child_process').ChildProcess} server @returns {Promise<void>} */
function stopServer(server) {
	return new Promise((resolve) => {
		if (server.exitCode !== null || server.signalCode !== null) return resolve();
		server.once('exit', () => resolve());
		server.kill('SIGINT');
	});
}

/**
 * Starts a throw-away server for tests; stopping it removes its data.
 * @returns {Promise<PostgresServer>}
 */
export async function startThrowAwayPostgres() {
	const folder = join(tmpdir(), `manyweir-test-${process.pid}-${Date.now()}`);
	const server = await startPostgres(folder, { isThrowAway: true });
	return {
		...server,
		stop: async () => {
			await server.stop();
			rmSync(folder, { recursive: true, force: true });
		}
	};
}
