import { connect, createServer, type AddressInfo, type Socket } from 'node:net';

/** A way to a database that can be cut and mended. */
export interface BreakableDatabase {
	readonly url: string;
	/** Ends all connections and takes no new ones, as a server that has gone. */
	cut(): Promise<void>;
	/** Takes connections again, at the same address. */
	mend(): Promise<void>;
	close(): Promise<void>;
}

/** Puts a relay before a database. */
export async function breakable(databaseUrl: string): Promise<BreakableDatabase> {
	const target = new URL(databaseUrl);
	const sockets = new Set<Socket>();
	const server = createServer((near) => {
		const far = connect(Number(target.port), target.hostname);
		for (const [socket, other] of [
			[near, far],
			[far, near]
		]) {
			sockets.add(socket);
			socket.pipe(other);
			socket.on('error', () => other.destroy());
			socket.on('close', () => {
				sockets.delete(socket);
				other.destroy();
			});
		}
	});
	const listen = (port: number) =>
		new Promise<void>((resolve) => server.listen(port, '127.0.0.1', resolve));
	await listen(0);
	const { port } = server.address() as AddressInfo;
	const cut = () =>
		new Promise<void>((resolve) => {
			server.close(() => resolve());
			for (const socket of sockets) socket.destroy();
		});
	const url = new URL(databaseUrl);
	url.port = String(port);
	return { url: url.href, cut, mend: () => listen(port), close: cut };
}
