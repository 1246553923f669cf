import { ConfigError } from '#lib/server/config.ts';

/** What the common ways to fail mean to whoever started the command. */
const EXPLANATIONS: Readonly<Record<string, string>> = {
	ECONNREFUSED: 'no database server answers at DATABASE_URL; start it or correct the address',
	CONNECT_TIMEOUT: 'the database server at DATABASE_URL does not answer; check host and port',
	ENOTFOUND: 'the host of DATABASE_URL is not known; correct the address',
	'28P01': 'the database refuses the password of DATABASE_URL; correct it',
	'28000': 'the database refuses the user of DATABASE_URL; correct it',
	'3D000': 'the database named in DATABASE_URL does not exist; create it',
	'42501': 'the user of DATABASE_URL may not change the schema; grant it',
	'53100': 'the disk of the database is full; free some room',
	ENOSPC: 'the disk is full; free some room'
};

function codeOf(error: unknown): string {
	if (typeof error !== 'object' || error === null) return '';
	if ('code' in error && typeof error.code === 'string') return error.code;
	return 'cause' in error ? codeOf(error.cause) : '';
}

/** Runs a service command; what goes wrong is one clear line, and the exit code is not 0. */
export async function runService(name: string, work: () => Promise<void>): Promise<void> {
	try {
		await work();
	} catch (error) {
		const explanation = EXPLANATIONS[codeOf(error)];
		const message = error instanceof Error ? error.message : String(error);
		const known = explanation ?? (error instanceof ConfigError ? message : undefined);
		console.error(
			`${name}: ${known ?? (error instanceof Error ? (error.stack ?? message) : message)}`
		);
		process.exitCode = 1;
	}
}
