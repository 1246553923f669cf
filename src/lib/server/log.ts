import pino from 'pino';

/** One JSON line per entry. Nothing secret is logged: no passwords, tokens, cookies or addresses. */
export const log = pino({ level: process.env.LOG_LEVEL ?? 'info', base: null });
