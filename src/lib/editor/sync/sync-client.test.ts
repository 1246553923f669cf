import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { MemoryStore, SyncWorld } from '../../../../tests/support/sync-world.ts';
import { floorplanSchema, hashFloorplan } from '#lib/floorplan/index.ts';
import {
	addItems,
	changeField,
	findItem,
	moveItems,
	removeItems,
	type EditDraft,
	type Operation
} from '#lib/floorplan/edits/index.ts';
import { backoffMs } from './backoff.ts';
import type { SyncClient } from './index.ts';

const start = floorplanSchema.parse(
	JSON.parse(readFileSync('tests/fixtures/floorplan-version-1.json', 'utf8'))
);
const R1 = { list: 'regulators', id: 'R1' } as const;
const R2 = { list: 'regulators', id: 'R2' } as const;

function newWorld(): SyncWorld {
	return new SyncWorld(start, () => 0.5);
}

/** Submits an action; gives its id and the operations that undo it. */
function act(world: SyncWorld, client: SyncClient, draft: EditDraft) {
	const id = world.newId();
	const result = client.submit({ id, ...draft });
	if (result.status !== 'applied') throw new Error(JSON.stringify(result));
	return { id, inverse: result.inverse };
}

function setOffset(client: SyncClient, id: string, volts: number): EditDraft {
	return changeField(client.document, 'regulators', [id], 'offsetV', volts);
}

function offsetOf(client: { document: typeof start }, id: string): number | undefined {
	return findItem(client.document, 'regulators', id)?.offsetV;
}

describe('saving', () => {
	it('takes effect at once and is saved in order, one request at a time', async () => {
		const world = newWorld();
		const client = world.open('Ada', new MemoryStore());
		const ids = [0.001, 0.002, 0.003].map(
			(volts) => act(world, client, setOffset(client, 'R1', volts)).id
		);
		expect(offsetOf(client, 'R1')).toBe(0.003);
		expect(client.state).toMatchObject({ status: 'saving', pending: 3 });
		await world.flush();
		expect(world.messages).toHaveLength(1);
		await world.quiet();
		expect(client.state).toMatchObject({ status: 'saved', pending: 0, reason: null });
		expect(world.server.log.map(({ id }) => id)).toEqual(ids);
		expect(client.version).toBe(3);
	});

	it('offline: counts the changes and says why; back online everything is sent once', async () => {
		const world = newWorld();
		const client = world.open('Ada', new MemoryStore());
		world.isOnline = false;
		act(world, client, setOffset(client, 'R1', 0.001));
		act(world, client, setOffset(client, 'R2', 0.002));
		await world.flush();
		await world.deliver();
		expect(client.state).toMatchObject({
			status: 'offline',
			pending: 2,
			reason: 'no connection'
		});
		world.isOnline = true;
		client.retryNow();
		await world.quiet();
		expect(client.state.status).toBe('saved');
		expect(world.server.version).toBe(2);
	});

	it('an answer that is lost does not make an edit happen twice', async () => {
		let chance = 0.5;
		const world = new SyncWorld(start, () => chance);
		world.faults = 0.3;
		const client = world.open('Ada', new MemoryStore());
		act(world, client, moveItems(client.document, [R1], 5, 0));
		await world.flush();
		// The request has left; its answer is lost, and the event too.
		chance = 0;
		const [request] = world.messages.splice(0, 1);
		request();
		expect(world.server.version).toBe(1);
		chance = 0.5;
		await world.quiet();
		expect(client.state.status).toBe('saved');
		expect(world.server.version).toBe(1);
		expect(findItem(client.document, 'regulators', 'R1')?.xUm).toBe(45);
	});

	it('an edit that does not apply is not sent, and the answer says why', async () => {
		const world = newWorld();
		const client = world.open('Ada', new MemoryStore());
		const result = client.submit({
			id: world.newId(),
			...changeField(client.document, 'cells', ['weir'], 'maxA', -1)
		});
		expect(result.status).toBe('refused');
		await world.quiet();
		expect(client.state.status).toBe('saved');
		expect(world.server.version).toBe(0);
	});

	it('waits longer after each failure, up to half a minute and a quarter', () => {
		const waits = [1, 2, 3, 8, 100].map((attempt) => backoffMs(attempt, 'seed'));
		expect([...waits].sort((a, b) => a - b)).toEqual(waits);
		expect(waits[0]).toBeGreaterThanOrEqual(500);
		expect(waits[0]).toBeLessThanOrEqual(625);
		expect(waits[4]).toBeGreaterThanOrEqual(30_000);
		expect(waits[4]).toBeLessThanOrEqual(37_500);
	});
});

describe('two people', () => {
	async function two() {
		const world = newWorld();
		const ada = world.open('Ada', new MemoryStore());
		const ben = world.open('Ben', new MemoryStore());
		await world.quiet();
		return { world, ada, ben };
	}

	it('edits of different objects merge', async () => {
		const { world, ada, ben } = await two();
		act(world, ada, setOffset(ada, 'R1', 0.001));
		act(world, ben, setOffset(ben, 'R2', 0.002));
		act(world, ben, changeField(ben.document, 'regulators', ['R1'], 'enabled', false));
		await world.quiet();
		for (const { document, state } of [ada, ben]) {
			expect(state.status).toBe('saved');
			expect(document.regulators.map(({ offsetV }) => offsetV)).toEqual([0.001, 0.002]);
			expect(document.regulators[0].enabled).toBe(false);
		}
	});

	/** Ada and Ben both set R1's offset; Ada's arrives first. Ben's edit also sets R2's. */
	async function contested() {
		const { world, ada, ben } = await two();
		act(world, ada, setOffset(ada, 'R1', 0.001));
		const mine = act(
			world,
			ben,
			changeField(ben.document, 'regulators', ['R1', 'R2'], 'offsetV', 0.009)
		);
		await world.quiet();
		return { world, ada, ben, mine };
	}

	it('the second to change a field is shown both values and who was first', async () => {
		const { ada, ben, mine } = await contested();
		expect(ada.state.status).toBe('saved');
		expect(ben.state).toMatchObject({
			status: 'conflict',
			pending: 0,
			conflicts: [
				{
					id: mine.id,
					edits: [mine.id],
					label: 'Change offsetV of 2 regulators',
					who: { by: 'Ada' },
					places: [{ ...R1, field: 'offsetV', mine: 0.009, theirs: 0.001, reason: 'changed' }]
				}
			]
		});
		expect(offsetOf(ben, 'R1')).toBe(0.001);
	});

	it('keep mine: sent anew, from what stands there now', async () => {
		const { world, ada, ben, mine } = await contested();
		ben.resolve(mine.id, 'mine');
		await world.quiet();
		expect(world.server.log[1].operations[0]).toMatchObject({ from: 0.001, to: 0.009 });
		expect([ada, ben].map((client) => offsetOf(client, 'R1'))).toEqual([0.009, 0.009]);
		expect([ada, ben].map((client) => offsetOf(client, 'R2'))).toEqual([0.009, 0.009]);
		expect(ben.state.status).toBe('saved');
	});

	it('keep theirs: the rest of the edit is kept', async () => {
		const { world, ada, ben, mine } = await contested();
		ben.resolve(mine.id, 'theirs');
		await world.quiet();
		expect([ada, ben].map((client) => offsetOf(client, 'R1'))).toEqual([0.001, 0.001]);
		expect([ada, ben].map((client) => offsetOf(client, 'R2'))).toEqual([0.009, 0.009]);
		expect(ben.state.status).toBe('saved');
	});

	it('a conflict stays until it is decided, even if the old value comes back', async () => {
		const { world, ada, ben } = await contested();
		act(world, ada, setOffset(ada, 'R1', 0));
		await world.quiet();
		expect(ben.state.conflicts[0].places).toMatchObject([{ mine: 0.009, theirs: 0 }]);
		act(world, ada, setOffset(ada, 'R1', 0.009));
		await world.quiet();
		// Now both want the same; the rest of the edit goes through.
		expect(ben.state.status).toBe('saved');
		expect([ada, ben].map((client) => offsetOf(client, 'R2'))).toEqual([0.009, 0.009]);
	});

	it('later edits of the same place wait with the first', async () => {
		const { world, ada, ben } = await two();
		act(world, ada, setOffset(ada, 'R1', 0.001));
		const first = act(world, ben, setOffset(ben, 'R1', 0.008));
		const second = act(world, ben, setOffset(ben, 'R1', 0.009));
		act(world, ben, moveItems(ben.document, [R1], 5, 0));
		await world.quiet();
		expect(ben.state.conflicts).toMatchObject([
			{ edits: [first.id, second.id], places: [{ mine: 0.009, theirs: 0.001 }] }
		]);
		expect(findItem(world.server.document, 'regulators', 'R1')?.xUm).toBe(45);
	});

	it('what one removed and the other changed can be brought back', async () => {
		const { world, ada, ben } = await two();
		act(world, ada, removeItems(ada.document, [R1]));
		const mine = act(world, ben, setOffset(ben, 'R1', 0.009));
		await world.quiet();
		expect(ben.state.conflicts[0].places).toEqual([
			{ ...R1, field: 'offsetV', mine: 0.009, reason: 'gone' }
		]);
		ben.resolve(mine.id, 'mine');
		await world.quiet();
		expect(findItem(ada.document, 'regulators', 'R1')).toEqual({
			...start.regulators[0],
			offsetV: 0.009
		});
		expect(ada.document.regulators.map(({ id }) => id)).toEqual(['R1', 'R2']);
	});

	it('two new items of one id: mine gets its values, theirs keeps them', async () => {
		for (const [choice, expected] of [
			['mine', 0.009],
			['theirs', 0.001]
		] as const) {
			const { world, ada, ben } = await two();
			const item = { ...start.regulators[0], id: 'new' };
			act(world, ada, addItems(ada.document, 'regulators', [{ ...item, offsetV: 0.001 }]));
			act(world, ben, addItems(ben.document, 'regulators', [{ ...item, offsetV: 0.009 }]));
			await world.quiet();
			const [conflict] = ben.state.conflicts;
			expect(conflict.places[0].reason).toBe('taken');
			ben.resolve(conflict.id, choice);
			await world.quiet();
			expect(offsetOf(ada, 'new')).toBe(expected);
			expect(hashFloorplan(ben.document)).toBe(hashFloorplan(ada.document));
		}
	});

	it('undo never takes back what somebody else did since', async () => {
		const { world, ada, ben } = await two();
		const { inverse } = act(world, ada, setOffset(ada, 'R1', 0.001));
		await world.quiet();
		act(world, ben, setOffset(ben, 'R1', 0.009));
		await world.quiet();
		const undo: { id: string; label: string; operations: Operation[] } = {
			id: world.newId(),
			label: 'Undo',
			operations: inverse
		};
		expect(ada.submit(undo)).toMatchObject({
			status: 'conflict',
			conflicts: [{ mine: 0, theirs: 0.009 }]
		});
		await world.quiet();
		expect(offsetOf(ben, 'R1')).toBe(0.009);
	});
});

describe('refusals', () => {
	it('an edit that the server refuses is taken back with what builds on it, the rest is saved', async () => {
		const world = newWorld();
		world.server.refuses = ({ operations }) =>
			operations.some((one) => one.op !== 'set' && one.list === 'cells')
				? 'Only analysts may.'
				: null;
		const client = world.open('Ada', new MemoryStore());
		const cell = { ...start.cells[0], id: 'big' };
		const first = act(world, client, addItems(client.document, 'cells', [cell]));
		const second = act(
			world,
			client,
			addItems(client.document, 'regulators', [{ ...start.regulators[0], id: 'R3', cell: 'big' }])
		);
		act(world, client, setOffset(client, 'R2', 0.002));
		await world.quiet();
		expect(client.state).toMatchObject({
			status: 'refused',
			pending: 0,
			refusals: [{ edits: [first.id, second.id], reason: 'Only analysts may.' }]
		});
		expect(client.document.cells).toHaveLength(1);
		expect(offsetOf({ document: world.server.document }, 'R2')).toBe(0.002);
		client.dismiss(first.id);
		expect(client.state.status).toBe('saved');
	});

	it('a pending edit that no longer fits the document says so, with the problem', async () => {
		const world = newWorld();
		const ada = world.open('Ada', new MemoryStore());
		const ben = world.open('Ben', new MemoryStore());
		await world.quiet();
		const cell = { list: 'cells', id: 'weir' } as const;
		act(world, ada, removeItems(ada.document, [R1, R2, cell]));
		await world.flush();
		await world.deliver();
		const added = { ...start.regulators[0], id: 'R3' };
		const mine = act(world, ben, addItems(ben.document, 'regulators', [added]));
		ben.refresh();
		await world.quiet();
		expect(ben.state).toMatchObject({
			status: 'refused',
			refusals: [{ id: mine.id, problems: [{ path: 'regulators[0] (R3).cell' }] }]
		});
		expect(hashFloorplan(ben.document)).toBe(hashFloorplan(ada.document));
	});

	it('a conflict that only the server sees is refused, not sent for ever', async () => {
		const world = newWorld();
		const submit = world.server.submit.bind(world.server);
		world.server.submit = (by, edit) =>
			edit.label === 'odd' ? { status: 'conflict' } : submit(by, edit);
		const client = world.open('Ada', new MemoryStore());
		act(world, client, { ...setOffset(client, 'R1', 0.001), label: 'odd' });
		act(world, client, setOffset(client, 'R2', 0.002));
		await world.quiet();
		expect(client.state.refusals).toMatchObject([{ label: 'odd' }]);
		expect(offsetOf({ document: world.server.document }, 'R2')).toBe(0.002);
	});

	it('a log that does not fit stops the page and keeps what is not saved', async () => {
		const world = newWorld();
		const store = new MemoryStore();
		const client = world.open('Ada', store);
		await world.quiet();
		world.server.editsAfter = () => ({
			status: 'edits',
			hasMore: false,
			edits: [{ id: world.newId(), label: 'x', operations: [], version: 7, by: 'Ben', at: '' }]
		});
		client.remoteChanged(7);
		act(world, client, setOffset(client, 'R1', 0.001));
		await world.quiet();
		expect(client.state).toMatchObject({ status: 'refused', mustReload: true, pending: 1 });
		expect(store.length).toBe(1);
	});
});

describe('closing the tab', () => {
	it('unsaved edits come back with the next visit of the same person', async () => {
		const world = newWorld();
		const store = new MemoryStore();
		const first = world.open('Ada', store);
		world.isOnline = false;
		act(world, first, setOffset(first, 'R1', 0.001));
		act(world, first, setOffset(first, 'R1', 0.002));
		await world.flush();
		first.dispose();
		world.messages.length = 0;

		world.isOnline = true;
		const other = world.open('Ben', store);
		expect(offsetOf(other, 'R1')).toBe(0);
		const again = world.open('Ada', store);
		expect(offsetOf(again, 'R1')).toBe(0.002);
		expect(again.state).toMatchObject({ status: 'saving', pending: 2 });
		await world.quiet();
		expect(again.state.status).toBe('saved');
		expect(world.server.log.map(({ by }) => by)).toEqual(['Ada', 'Ada']);
		expect(store.length).toBe(0);
	});

	it('an edit that had arrived is not sent or shown again', async () => {
		const world = newWorld();
		const store = new MemoryStore();
		const first = world.open('Ada', store);
		act(world, first, moveItems(first.document, [R1], 5, 0));
		await world.flush();
		await world.deliver();
		first.dispose();
		expect(world.server.version).toBe(1);
		const again = world.open('Ada', store);
		await world.quiet();
		expect(again.state.status).toBe('saved');
		expect(world.server.version).toBe(1);
		expect(findItem(again.document, 'regulators', 'R1')?.xUm).toBe(45);
	});

	it('two tabs of one person send each edit once', async () => {
		const world = newWorld();
		const store = new MemoryStore();
		const first = world.open('Ada', store);
		act(world, first, setOffset(first, 'R1', 0.001));
		const second = world.open('Ada', store);
		act(world, second, setOffset(second, 'R2', 0.002));
		await world.quiet();
		for (const { state, document } of [first, second]) {
			expect(state.status).toBe('saved');
			expect(document.regulators.map(({ offsetV }) => offsetV)).toEqual([0.001, 0.002]);
		}
		expect(world.server.version).toBe(2);
	});

	it('full storage is said, and what it could not hold is saved all the same', async () => {
		const world = newWorld();
		const store = new MemoryStore();
		store.isFull = true;
		const client = world.open('Ada', store);
		act(world, client, setOffset(client, 'R1', 0.001));
		expect(client.state.unbuffered).toBe(1);
		await world.quiet();
		expect(client.state).toMatchObject({ status: 'saved', unbuffered: 0 });
		expect(world.server.version).toBe(1);
	});

	it('junk in the storage is counted and harms nothing', async () => {
		const world = newWorld();
		const store = new MemoryStore();
		store.setItem('manyweir.edit.Ada.plan.x', '{ "edit": 1');
		store.setItem('manyweir.edit.Ada.plan.y', '{ "edit": { "id": "1" }, "order": -1 }');
		const client = world.open('Ada', store);
		await world.quiet();
		expect(client.state).toMatchObject({ status: 'saved', unreadable: 2 });
	});
});
