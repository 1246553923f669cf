import type { Author } from './held.ts';
import { placeOf, wholeOf } from './places.ts';
import type { RemoteEdit } from './transport.ts';
import type { RemovedItems } from './wishes.ts';

/** What others did while this page was open: who touched each place last, and what they removed. */
export class History {
	readonly #authors = new Map<string, Author>();
	readonly #removed = new Map<string, NonNullable<ReturnType<RemovedItems['get']>>>();

	get authors(): ReadonlyMap<string, Author> {
		return this.#authors;
	}

	get removed(): RemovedItems {
		return this.#removed;
	}

	record({ operations, by, at }: RemoteEdit): void {
		for (const operation of operations) {
			const place = placeOf(operation);
			this.#authors.set(place, { by, at });
			this.#authors.set(wholeOf(place), { by, at });
			if (operation.op === 'remove') {
				this.#removed.set(place, { index: operation.index, item: operation.item });
			} else if (operation.op === 'insert') {
				this.#removed.delete(place);
			}
		}
	}
}
