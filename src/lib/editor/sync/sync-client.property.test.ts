import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { expect, it } from 'vitest';
import { MemoryStore, seeded, SyncWorld } from '../../../../tests/support/sync-world.ts';
import { floorplanSchema, hashFloorplan, type Floorplan } from '#lib/floorplan/index.ts';
import {
	addItems,
	changeField,
	duplicateItems,
	removeItems,
	setProperty,
	type EditDraft,
	type Operation
} from '#lib/floorplan/edits/index.ts';
import type { SyncClient } from './index.ts';

const parsed = floorplanSchema.parse(
	JSON.parse(readFileSync('tests/fixtures/floorplan-version-1.json', 'utf8'))
);
const [first] = parsed.regulators;
/** A and B are each changed by one person only, S1 to S3 by both. */
const start: Floorplan = {
	...parsed,
	regulators: ['A', 'B', 'S1', 'S2', 'S3'].map((id) => ({ ...first, id }))
};

interface Person {
	readonly name: 'A' | 'B';
	readonly store: MemoryStore;
	client: SyncClient;
	/** Ids of edits of the own regulator, in order: nothing can stand against them. */
	readonly own: string[];
	/** Ids of edits of shared things with values that nobody else uses, never undone or removed. */
	readonly shared: Set<string>;
	readonly undo: { id: string; operations: Operation[] }[];
	/** Ids that were shown as conflicts or refusals. */
	readonly shown: Set<string>;
}

/** A change of something that both change; `unique` never comes twice. */
function sharedDraft(document: Floorplan, pick: number, unique: number): EditDraft {
	const id = unique % 2 === 0 ? 'S1' : 'S2';
	const list = 'regulators';
	switch (Math.floor(pick * 6)) {
		case 0:
			return changeField(document, list, [id], 'offsetV', unique / 1000);
		case 1: {
			const { label, operations } = changeField(document, list, ['S1', 'S2'], 'xUm', unique);
			return { label, operations };
		}
		case 2:
			return setProperty(document, 'limits', { dropV: unique });
		case 3:
			return addItems(document, list, [{ ...first, id: 'S3', offsetV: unique }]);
		case 4:
			return removeItems(document, [{ list, id: 'S3' }]);
		default: {
			const { label, operations } = duplicateItems(document, [{ list, id }], unique / 1000, 0);
			return { label, operations };
		}
	}
}

function attempt(world: SyncWorld, { client, undo }: Person, draft: EditDraft): string | null {
	if (draft.operations.length === 0) return null;
	const id = world.newId();
	const result = client.submit({ id, ...draft });
	if (result.status !== 'applied') return null;
	undo.push({ id, operations: result.inverse });
	return id;
}

function look({ client, shown }: Person): void {
	const { conflicts, refusals } = client.state;
	for (const { edits } of [...conflicts, ...refusals]) for (const id of edits) shown.add(id);
}

async function act(world: SyncWorld, people: Person[], random: () => number, step: number) {
	const person = people[Math.floor(random() * people.length)];
	const { client } = person;
	const choice = random();
	if (choice < 0.12) {
		const draft = changeField(client.document, 'regulators', [person.name], 'offsetV', step / 1000);
		const id = attempt(world, person, draft);
		if (id) person.own.push(id);
	} else if (choice < 0.3) {
		const draft = sharedDraft(client.document, random(), step);
		const id = attempt(world, person, draft);
		const isOnS3 = draft.operations.some((one) => 'item' in one && one.item.id === 'S3');
		if (id && !isOnS3) person.shared.add(id);
	} else if (choice < 0.35) {
		const undone = person.undo.pop();
		if (undone) {
			const { operations } = undone;
			person.shared.delete(undone.id);
			// Undoing changes of the own regulator counts as changing it.
			const isOwn = operations.some((one) => one.op === 'change' && one.id === person.name);
			const id = attempt(world, person, { label: 'Undo', operations });
			if (id && isOwn) person.own.push(id);
		}
	} else if (choice < 0.4) {
		await world.fireTimer();
	} else if (choice < 0.43) {
		look(person);
		client.dispose();
		person.client = world.open(person.name, person.store);
	} else if (choice < 0.47) {
		look(person);
		const [conflict] = client.state.conflicts;
		if (conflict) {
			client.resolve(conflict.id, random() < 0.5 ? 'mine' : 'theirs');
			// A decision may put back an old value over later edits: together they may then want what
			// is there already, and need not be sent.
			person.shared.clear();
		}
	} else {
		await world.deliver(Math.floor(random() * world.messages.length));
	}
	await world.flush();
	people.forEach(look);
}

/** Faults end, everybody decides, until nothing is left. */
async function finish(world: SyncWorld, people: Person[], random: () => number): Promise<void> {
	world.faults = 0;
	for (let round = 0; round < 200; round++) {
		for (const { client } of people) client.refresh();
		await world.quiet();
		people.forEach(look);
		const open = people.filter(({ client }) => client.state.status !== 'saved');
		if (open.length === 0) return;
		for (const { client } of open) {
			for (const { id } of client.state.refusals) client.dismiss(id);
			for (const { id } of client.state.conflicts) {
				client.resolve(id, random() < 0.5 ? 'mine' : 'theirs');
			}
		}
	}
	throw new Error(JSON.stringify(people.map(({ client }) => client.state)));
}

it('two people, a bad network, closed tabs: every edit once, both end with the server', async () => {
	const seen = { conflicts: 0, own: 0 };
	await fc.assert(
		fc.asyncProperty(fc.integer(), fc.integer({ min: 0, max: 40 }), async (seed, percent) => {
			const random = seeded(seed);
			const world = new SyncWorld(start, random);
			world.faults = percent / 100;
			const people = (['A', 'B'] as const).map((name): Person => {
				const store = new MemoryStore();
				const client = world.open(name, store);
				return {
					name,
					store,
					client,
					own: [],
					shared: new Set(),
					undo: [],
					shown: new Set()
				};
			});
			for (let step = 1; step <= 150; step++) await act(world, people, random, step);
			await finish(world, people, random);

			const log = world.server.log.map(({ id }) => id);
			expect(new Set(log).size).toBe(log.length);
			const hash = hashFloorplan(world.server.document);
			for (const { client, store, own, shared, shown } of people) {
				expect(hashFloorplan(client.document)).toBe(hash);
				expect(client.version).toBe(world.server.version);
				expect(store.length).toBe(0);
				// Edits of what nobody else touches are there, once, in the order in which they were made.
				expect(log.filter((id) => own.includes(id))).toEqual(own);
				expect(own.filter((id) => shown.has(id))).toEqual([]);
				// Nothing else vanishes without having been shown.
				expect([...shared].filter((id) => !log.includes(id) && !shown.has(id))).toEqual([]);
				seen.own += own.length;
				seen.conflicts += shown.size;
			}
		}),
		{ numRuns: 60 }
	);
	// The runs do meet what they are about.
	expect(seen.own).toBeGreaterThan(100);
	expect(seen.conflicts).toBeGreaterThan(20);
}, 60_000);
