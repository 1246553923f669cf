import pino from 'pino';

/** The code of an error or of what caused it; empty where there is none. */
export function codeOf(error: unknown): string {
	if (typeof error !== 'object' || error === null) return '';
	if ('code' in error && typeof error.code === 'string') return error.code;
	return 'cause' in error ? codeOf(error.cause) : '';
}

/**
 * What of an error may be logged. The text of a failed query names the values that were to be
 * stored, hashes and addresses among them: its cause says what is wrong without them.
 */
export function loggable(error: unknown): Record<string, unknown> {
	if (!(error instanceof Error)) return { message: String(error) };
	const cause = error.cause instanceof Error ? error.cause : error;
	return { name: cause.name, code: codeOf(error), message: cause.message, stack: cause.stack };
}

/** One JSON line per entry. Nothing secret is logged: no passwords, tokens, cookies or addresses. */
export const log = pino({
	level: process.env.LOG_LEVEL ?? 'info',
	base: null,
	serializers: { error: loggable }
});
