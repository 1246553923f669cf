import { closeDatabase, connection } from './db/client.ts';
import { EventBus } from './events/bus.ts';

let bus: EventBus | undefined;

/** The event bus of this process. */
export function eventBus(): EventBus {
	bus ??= new EventBus(connection());
	return bus;
}

const shutdown = new AbortController();

/** Aborted when the server stops: open event streams end with it. */
export const shutdownSignal = shutdown.signal;

/** Ends streams and connections, so that the process can exit. */
export async function closeRuntime(): Promise<void> {
	shutdown.abort();
	bus = undefined;
	await closeDatabase();
}
