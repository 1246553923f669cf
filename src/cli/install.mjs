import { existsSync, lstatSync, readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { Refusal, ROOT } from './paths.mjs';
import { run } from './run.mjs';

const LEAST_NODE = [20, 19];

/** Refuses a Node.js that the locked packages do not run on. */
export function checkNode() {
	const [major, minor] = process.versions.node.split('.').map(Number);
	if (major > LEAST_NODE[0] || (major === LEAST_NODE[0] && minor >= LEAST_NODE[1])) return;
	throw new Refusal(
		`Node.js ${process.versions.node} is too old: install version ${LEAST_NODE.join('.')} or newer.`
	);
}

/** Installs the locked packages where they are missing or older than the lock. */
export async function installPackages() {
	const marker = join(ROOT, 'node_modules', '.package-lock.json');
	const lock = join(ROOT, 'package-lock.json');
	if (existsSync(marker) && statSync(marker).mtimeMs >= statSync(lock).mtimeMs) return;
	const folder = join(ROOT, 'node_modules');
	// Installing through a link would empty the folder that it leads to, which somebody else uses.
	if (lstatSync(folder, { throwIfNoEntry: false })?.isSymbolicLink()) {
		throw new Refusal('node_modules is a link to packages of another state: remove the link.');
	}
	console.log('Installing the locked packages …');
	const { code, output } = await run('npm', ['ci', '--no-audit', '--no-fund'], { quiet: true });
	if (code !== 0) throw new Refusal(`npm ci failed: ${lastLine(output)}`);
}

/** @param {string} output */
export function lastLine(output) {
	return output.trim().split('\n').at(-1) ?? '';
}

/** Folder of the newest PostgreSQL server binaries, or undefined. */
export function postgresBinaries() {
	const versions = '/usr/lib/postgresql';
	if (!existsSync(versions)) return undefined;
	return readdirSync(versions)
		.sort((a, b) => Number(b) - Number(a))
		.map((version) => join(versions, version, 'bin'))
		.find((folder) => existsSync(join(folder, 'initdb')));
}

/** @param {string} name */
function isOnPath(name) {
	return (process.env.PATH ?? '').split(':').some((folder) => existsSync(join(folder, name)));
}

/** Folder of Debian's BLAS for several threads, or undefined. */
export function openBlasFolder() {
	return readdirSync('/usr/lib')
		.map((name) => join('/usr/lib', name, 'openblas-pthread'))
		.find((folder) => existsSync(folder));
}

/** Debian packages that the commands use, and how to see that one is there. */
const DEBIAN = {
	postgresql: () => postgresBinaries() !== undefined,
	chromium: () => isOnPath('chromium'),
	ngspice: () => isOnPath('ngspice'),
	'python3-scipy': () => existsSync('/usr/lib/python3/dist-packages/scipy'),
	'g++': () => isOnPath('g++'),
	'libsuitesparse-dev': () => existsSync('/usr/include/suitesparse/cholmod.h'),
	'libhypre-dev': () => existsSync('/usr/include/hypre/HYPRE.h') && isOnPath('mpicxx'),
	'libeigen3-dev': () => existsSync('/usr/include/eigen3'),
	'libopenblas0-pthread': () => openBlasFolder() !== undefined
};

/**
 * Makes sure that Debian packages are there, installing what is missing where it may.
 * @param {readonly (keyof typeof DEBIAN)[]} names
 */
export async function requireDebian(names) {
	const missing = names.filter((name) => !DEBIAN[name]());
	if (missing.length === 0) return;
	const install = ['-o', 'DPkg::Lock::Timeout=300', 'install', '-y', '--no-install-recommends'];
	const isRoot = process.getuid?.() === 0;
	const prefix = isRoot ? [] : ['sudo', '-n'];
	const mayInstall =
		isOnPath('apt-get') &&
		(isRoot || (await run('sudo', ['-n', 'true'], { quiet: true })).code === 0);
	const byHand = `apt-get install --no-install-recommends ${missing.join(' ')}`;
	if (!mayInstall) throw new Refusal(`Missing: ${missing.join(', ')}. Install as root: ${byHand}`);
	console.log(`Installing Debian's ${missing.join(', ')} …`);
	const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
	const [command, ...first] = [...prefix, 'apt-get'];
	await run(command, [...first, 'update'], { env, quiet: true });
	const { code, output } = await run(command, [...first, ...install, ...missing], {
		env,
		quiet: true
	});
	if (code !== 0 || missing.some((name) => !DEBIAN[name]())) {
		throw new Refusal(
			`Installing ${missing.join(', ')} failed: ${lastLine(output)}. By hand: ${byHand}`
		);
	}
}
