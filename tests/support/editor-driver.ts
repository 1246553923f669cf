import { applyOperations, type EditDraft, type ItemReference } from '#lib/floorplan/edits/index.ts';
import {
	floorplanSchema,
	hashFloorplan,
	type Floorplan,
	type FloorplanInput
} from '#lib/floorplan/index.ts';
import { commandOf, isAvailable, type PageActions } from '#lib/editor/commands/index.ts';
import {
	diePoint,
	Editor,
	screenPoint,
	toScreen,
	type EditorOptions,
	type PointerInput
} from '#lib/editor/index.ts';

interface Modifiers {
	readonly shift?: boolean;
	readonly alt?: boolean;
}

/**
 * Drives an editor the way a person does: presses, moves, releases and keys, with places given on
 * the die. Edits go to a keeper in memory; `edits` are what a server would have been sent.
 */
export class EditorDriver {
	readonly editor: Editor;
	readonly edits: EditDraft[] = [];
	page: PageActions = {};
	#document: Floorplan;
	#timers: (() => void)[] = [];

	constructor(
		floorplan: Floorplan,
		{ canDraw = true, ...options }: EditorOptions & { canDraw?: boolean } = {}
	) {
		this.#document = floorplan;
		this.editor = new Editor(
			floorplan,
			{
				submit: (draft) => {
					const result = applyOperations(this.#document, draft.operations);
					if (result.status === 'applied') {
						this.edits.push(draft);
						this.#change(result.floorplan);
					}
					return result;
				}
			},
			canDraw,
			{
				schedule: (_delayMs, callback) => {
					this.#timers.push(callback);
					return () => (this.#timers = this.#timers.filter((one) => one !== callback));
				},
				...options
			}
		);
		this.editor.resize(1000, 800);
	}

	#change(document: Floorplan): void {
		this.#document = document;
		this.editor.documentChanged(document);
	}

	get hash(): string {
		return hashFloorplan(this.editor.floorplan);
	}

	get selection(): string[] {
		return this.editor.selected.map(({ id }) => id);
	}

	get state(): string {
		return this.editor.state.name;
	}

	/** Place of a regulator, um. */
	placeOf(id: string): readonly [number, number] {
		const regulator = this.editor.floorplan.regulators.find((one) => one.id === id);
		if (!regulator) throw new RangeError(`there is no regulator ${id}`);
		return [regulator.xUm, regulator.yUm];
	}

	/** Centre of an item on the die, um. */
	centreOf({ list, id }: ItemReference): readonly [number, number] {
		const bounds = this.editor.scene.boundsOf(`${list}:${id}`);
		if (!bounds) throw new RangeError(`there is no ${id} in ${list}`);
		return [(bounds.minX + bounds.maxX) / 2, (bounds.minY + bounds.maxY) / 2];
	}

	#input(xUm: number, yUm: number, { shift = false, alt = false }: Modifiers): PointerInput {
		const point = toScreen(this.editor.camera, diePoint(xUm, yUm));
		return { point: screenPoint(point[0], point[1]), isAdding: shift, isFree: alt };
	}

	press(xUm: number, yUm: number, modifiers: Modifiers = {}): this {
		this.editor.pointerMove(this.#input(xUm, yUm, modifiers));
		this.editor.pointerDown(this.#input(xUm, yUm, modifiers));
		return this;
	}

	move(xUm: number, yUm: number, modifiers: Modifiers = {}): this {
		this.editor.pointerMove(this.#input(xUm, yUm, modifiers));
		return this;
	}

	release(xUm: number, yUm: number, modifiers: Modifiers = {}): this {
		this.editor.pointerUp(this.#input(xUm, yUm, modifiers));
		return this;
	}

	click(xUm: number, yUm: number, modifiers: Modifiers = {}): this {
		return this.press(xUm, yUm, modifiers).release(xUm, yUm, modifiers);
	}

	drag(
		from: readonly [number, number],
		to: readonly [number, number],
		modifiers: Modifiers = {}
	): this {
		const half = [(from[0] + to[0]) / 2, (from[1] + to[1]) / 2] as const;
		return this.press(...from, modifiers)
			.move(...half, modifiers)
			.move(...to, modifiers)
			.release(...to, modifiers);
	}

	/** A key as commands name it: `Mod+Shift+z`, `ArrowLeft`. False where no command took it. */
	key(name: string): boolean {
		const parts = name.split(/\+(?=.)/);
		const key = parts.at(-1) ?? '';
		const shiftKey = parts.includes('Shift');
		const command = commandOf({
			key: shiftKey && key.length === 1 ? key.toUpperCase() : key,
			code: /^\d$/.test(key) ? `Digit${key}` : key,
			ctrlKey: parts.includes('Mod'),
			metaKey: false,
			shiftKey,
			altKey: false
		});
		if (!command || !isAvailable(command, this.editor, this.page)) return false;
		command.run(this.editor, this.page);
		return true;
	}

	/** The pause after which a run of nudges is done. */
	pause(): void {
		const timers = this.#timers;
		this.#timers = [];
		for (const callback of timers) callback();
	}

	/** Somebody else's edit arrives. */
	receive(draft: EditDraft): void {
		const result = applyOperations(this.#document, draft.operations);
		if (result.status !== 'applied') throw new Error(`the edit does not apply: ${result.status}`);
		this.#change(result.floorplan);
	}
}

/** A small die with four regulators in a row, two blocks, two bumps and a keep-out; sites every 5 um. */
export function smallPlan(changes: Partial<FloorplanInput> = {}): Floorplan {
	const regulator = (id: string, xUm: number, rest: object = {}) => ({
		id,
		cell: 'weir',
		input: 'vin',
		output: 'vdd',
		xUm,
		yUm: 100,
		...rest
	});
	return floorplanSchema.parse({
		format: 'manyweir-floorplan',
		version: 1,
		name: 'Small',
		die: {
			outline: [
				[0, 0],
				[1000, 0],
				[1000, 800],
				[0, 800]
			]
		},
		sites: { originUm: [0, 0], pitchUm: [5, 5] },
		layers: [
			{ id: 'M1', direction: 'horizontal', sheetOhm: 0.05 },
			{ id: 'M2', direction: 'vertical', sheetOhm: 0.05 }
		],
		nets: [
			{ id: 'vin', kind: 'input', volts: 1.5 },
			{ id: 'vdd', kind: 'regulated', volts: 1.2 }
		],
		straps: [
			{ id: 'vdd.M1', net: 'vdd', layer: 'M1', pitchUm: 50, widthUm: 4, offsetUm: 25 },
			{ id: 'vdd.M2', net: 'vdd', layer: 'M2', pitchUm: 50, widthUm: 4, offsetUm: 25 }
		],
		feeds: [
			{ id: 'B1', net: 'vin', xUm: 900, yUm: 700, seriesOhm: 0.1 },
			{ id: 'B2', net: 'vin', xUm: 950, yUm: 700, seriesOhm: 0.1 }
		],
		cells: [
			{
				id: 'weir',
				widthUm: 40,
				heightUm: 20,
				outputOhm: 0.2,
				onOhm: 1,
				maxA: 0.05,
				minA: 0.001,
				quiescentA: 0.0001,
				offsetSigmaV: 0.002
			}
		],
		regulators: [
			regulator('R1', 100),
			regulator('R2', 200),
			regulator('R3', 300),
			regulator('F', 400, { fixed: true })
		],
		blocks: [
			{
				id: 'cpu',
				net: 'vdd',
				outline: [
					[100, 200],
					[500, 200],
					[500, 600],
					[100, 600]
				],
				amps: { default: 0.05 }
			},
			{
				id: 'io',
				net: 'vdd',
				outline: [
					[600, 200],
					[800, 200],
					[800, 400],
					[600, 400]
				],
				amps: { default: 0.01 }
			}
		],
		keepouts: [
			{
				id: 'quiet',
				outline: [
					[850, 50],
					[950, 50],
					[950, 150],
					[850, 150]
				],
				forbids: ['regulators']
			}
		],
		limits: { spacingUm: 5 },
		...changes
	});
}
