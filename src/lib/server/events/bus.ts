import type { FloorplanEvent } from '#lib/contracts/index.ts';
import type { Connection } from '../db/client.ts';
import { findJob } from '../jobs/job-rows.ts';
import { log } from '../log.ts';
import { EVENTS_CHANNEL, noticeSchema, type Notice } from './publish.ts';

export interface EventListener {
	onEvent(event: FloorplanEvent): void;
	/** Events may have been missed while the database was away. */
	onGap(): void;
}

/**
 * Passes what changed in the database on to the event streams of this process. One connection
 * listens for all of them; postgres.js listens again by itself after the database was away.
 */
export class EventBus {
	readonly #connection: Connection;
	readonly #listeners = new Map<string, Set<EventListener>>();
	#listening: Promise<unknown> | undefined;
	#isConnected = false;
	/** Notices are passed on one after the other: a job must not be told done, then running. */
	#last: Promise<void> = Promise.resolve();

	constructor(connection: Connection) {
		this.#connection = connection;
	}

	/** Calls back on every event of a floorplan until the returned function is called. */
	async subscribe(floorplanId: string, listener: EventListener): Promise<() => void> {
		const listeners = this.#listeners.get(floorplanId) ?? new Set();
		this.#listeners.set(floorplanId, listeners);
		listeners.add(listener);
		const unsubscribe = () => {
			listeners.delete(listener);
			if (listeners.size === 0 && this.#listeners.get(floorplanId) === listeners) {
				this.#listeners.delete(floorplanId);
			}
		};
		this.#listening ??= this.#listen();
		try {
			await this.#listening;
		} catch (error) {
			this.#listening = undefined;
			unsubscribe();
			throw error;
		}
		return unsubscribe;
	}

	#listen(): Promise<unknown> {
		return this.#connection.sql.listen(
			EVENTS_CHANNEL,
			(payload) => {
				this.#last = this.#last
					.then(() => this.#receive(payload))
					.catch((error: unknown) => log.error({ error }, 'event not delivered'));
			},
			() => {
				if (this.#isConnected) this.#tellGap();
				this.#isConnected = true;
			}
		);
	}

	#tellGap(): void {
		for (const listeners of [...this.#listeners.values()]) {
			for (const listener of [...listeners]) listener.onGap();
		}
	}

	async #receive(payload: string): Promise<void> {
		const notice = noticeSchema.parse(JSON.parse(payload));
		if (!this.#listeners.has(notice.floorplanId)) return;
		const event = await this.#toEvent(notice);
		if (!event) return;
		for (const { onEvent } of [...(this.#listeners.get(notice.floorplanId) ?? [])]) onEvent(event);
	}

	async #toEvent(notice: Notice): Promise<FloorplanEvent | null> {
		if (notice.type !== 'job') {
			const { floorplanId: _addressee, ...event } = notice;
			return event;
		}
		const job = await findJob(this.#connection.db, notice.jobId);
		return job ? { type: 'job', job } : null;
	}
}
