/**
 * The web server: the built handler behind headers that every answer carries, static files
 * included, which the framework serves before any hook of ours runs.
 */
import { createServer } from 'node:http';

const PORT = Number(process.env.PORT ?? 4310);
const HOST = process.env.HOST ?? '127.0.0.1';
process.env.ORIGIN ??= `http://127.0.0.1:${PORT}`;
// Routes set their own, smaller limits; this one bounds what is read at all.
process.env.BODY_SIZE_LIMIT ??= '20M';

/** Time for running requests to end before the process exits. */
const GRACE_MS = 5000;

const { handler } = await import('../../build/handler.js');

const HEADERS = {
	'x-content-type-options': 'nosniff',
	'referrer-policy': 'same-origin',
	'cross-origin-opener-policy': 'same-origin',
	'cross-origin-resource-policy': 'same-origin',
	'x-frame-options': 'DENY'
};
const origin = new URL(process.env.ORIGIN);

const server = createServer((request, response) => {
	for (const [name, value] of Object.entries(HEADERS)) response.setHeader(name, value);
	if (origin.protocol === 'https:') {
		response.setHeader('strict-transport-security', 'max-age=31536000; includeSubDomains');
	}
	// The cookie and the guard against other sites belong to one origin: lead the other name there.
	if (request.headers.host === `localhost:${PORT}` && origin.hostname === '127.0.0.1') {
		response.writeHead(308, { location: new URL(request.url ?? '/', origin).href }).end();
		return;
	}
	handler(request, response, () => response.writeHead(404).end());
});

let isStopping = false;
/** @param {string} reason */
function stop(reason) {
	if (isStopping) return;
	isStopping = true;
	// Ends event streams and the database pool; see the server's hooks.
	process.emit('sveltekit:shutdown', reason);
	server.close(() => process.exit(0));
	server.closeIdleConnections();
	setTimeout(() => process.exit(0), GRACE_MS).unref();
}
process.on('SIGTERM', () => stop('SIGTERM'));
process.on('SIGINT', () => stop('SIGINT'));
// Whoever started us is gone.
process.on('disconnect', () => stop('disconnect'));

server.on('error', (/** @type {NodeJS.ErrnoException} */ error) => {
	const reason =
		error.code === 'EADDRINUSE'
			? `port ${PORT} of ${HOST} is taken; stop what uses it or set PORT`
			: error.code === 'EACCES'
				? `port ${PORT} may not be used; set PORT to one above 1023`
				: error.message;
	console.error(`The web server does not start: ${reason}.`);
	process.exit(1);
});
server.listen(PORT, HOST, () => process.send?.('ready'));
