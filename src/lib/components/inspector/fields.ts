import {
	jsonEquals,
	ORIENTATIONS,
	type Floorplan,
	type ItemList,
	type OutlineUm
} from '#lib/floorplan/index.ts';
import { frameOf, withFrame, type OutlineFrame } from '#lib/floorplan/edits/index.ts';
import type { Unit } from '#lib/units/index.ts';

/** How a value is shown and typed. */
export type InspectorInput =
	| {
			readonly kind: 'quantity';
			readonly unit: Unit;
			readonly isOptional?: boolean;
			/** What is wrong with a value, or undefined. */
			readonly check?: (value: number) => string | undefined;
	  }
	| {
			readonly kind: 'choice';
			readonly options: readonly { readonly value: string; readonly label: string }[];
	  }
	| { readonly kind: 'switch' }
	| { readonly kind: 'text' };

/** An item as the inspector sees it: fields by name. */
export type InspectedItem = Readonly<Record<string, unknown>>;

/** A value of an item that the inspector offers: where it is read, and what it makes of its field. */
export interface InspectorField {
	readonly key: string;
	readonly label: string;
	readonly input: InspectorInput;
	/** The document's field that changes. */
	readonly field: string;
	readonly read: (item: InspectedItem) => unknown;
	readonly write: (item: InspectedItem, value: unknown) => unknown;
	/** Fields with a heading of their own stand under it. */
	readonly group?: string;
}

/** A field of the document shown as it is. */
function plain(field: string, label: string, input: InspectorInput): InspectorField {
	return { key: field, label, input, field, read: (item) => item[field], write: (_, to) => to };
}

const positive = (value: number) => (value > 0 ? undefined : 'enter more than 0');
const notNegative = (value: number) => (value >= 0 ? undefined : 'enter 0 or more');

function quantity(field: string, label: string, unit: Unit): InspectorField {
	return plain(field, label, { kind: 'quantity', unit });
}

function positiveQuantity(
	field: string,
	label: string,
	unit: Unit,
	isOptional = false
): InspectorField {
	return plain(field, label, { kind: 'quantity', unit, check: positive, isOptional });
}

function choice(field: string, label: string, ids: readonly string[]): InspectorField {
	const options = ids.map((id) => ({ value: id, label: id }));
	return plain(field, label, { kind: 'choice', options });
}

const NAME: InspectorField = plain('name', 'Name', { kind: 'text' });

function netsOf({ nets }: Floorplan, ...kinds: string[]): string[] {
	return nets.filter(({ kind }) => kinds.includes(kind)).map(({ id }) => id);
}

/** Place and size of what has an outline; a size stretches it from its lower left corner. */
function frameFields(): InspectorField[] {
	const labels: readonly (readonly [keyof OutlineFrame, string])[] = [
		['xUm', 'x'],
		['yUm', 'y'],
		['widthUm', 'Width'],
		['heightUm', 'Height']
	];
	return labels.map(([side, label]) => ({
		key: side,
		label,
		input: {
			kind: 'quantity',
			unit: 'um',
			check: side === 'widthUm' || side === 'heightUm' ? positive : undefined
		},
		field: 'outline',
		read: ({ outline }) => frameOf(outline as OutlineUm)[side],
		write: ({ outline }, value) => withFrame(outline as OutlineUm, { [side]: value as number })
	}));
}

/** The current of a block in each mode. */
function currentFields({ modes }: Floorplan): InspectorField[] {
	return modes.map(({ id, name }) => ({
		key: `amps.${id}`,
		label: name ?? id,
		group: 'Current by mode',
		input: { kind: 'quantity', unit: 'A', isOptional: true },
		field: 'amps',
		read: ({ amps }) => (amps as Readonly<Record<string, number>>)[id],
		write: ({ amps }, value) => {
			const { [id]: _before, ...others } = amps as Readonly<Record<string, number>>;
			return value === undefined ? others : { ...others, [id]: value };
		}
	}));
}

function forbidsField(kind: 'regulators' | 'straps', label: string): InspectorField {
	return {
		key: `forbids.${kind}`,
		label,
		group: 'Keeps out',
		input: { kind: 'switch' },
		field: 'forbids',
		read: ({ forbids }) => (forbids as readonly string[]).includes(kind),
		write: ({ forbids }, isForbidden) => {
			const others = (forbids as readonly string[]).filter((one) => one !== kind);
			return isForbidden ? [...others, kind] : others;
		}
	};
}

const SENSE_RANGE: InspectorField = {
	key: 'senseLoop.rangeV',
	label: 'Slow loop, range',
	input: { kind: 'quantity', unit: 'V', check: notNegative },
	field: 'senseLoop',
	read: ({ senseLoop }) => (senseLoop as { rangeV: number } | undefined)?.rangeV,
	write: ({ senseLoop }, value) =>
		senseLoop === undefined ? undefined : { ...(senseLoop as object), rangeV: value }
};

/** What the inspector offers for items of a list. */
export function fieldsOf(
	list: ItemList,
	floorplan: Floorplan,
	items: readonly object[]
): InspectorField[] {
	switch (list) {
		case 'regulators':
			return [
				NAME,
				choice(
					'cell',
					'Cell',
					floorplan.cells.map(({ id }) => id)
				),
				choice('orient', 'Orientation', ORIENTATIONS),
				quantity('xUm', 'x', 'um'),
				quantity('yUm', 'y', 'um'),
				choice('output', 'Output net', netsOf(floorplan, 'regulated')),
				{
					...plain('input', 'Input net', {
						kind: 'choice',
						options: [
							...netsOf(floorplan, 'input').map((id) => ({ value: id, label: id })),
							{ value: '', label: 'ideal' }
						]
					}),
					read: ({ input }) => input ?? '',
					write: (_, value) => (value === '' ? null : value)
				},
				quantity('offsetV', 'Offset', 'V'),
				plain('enabled', 'In service', { kind: 'switch' }),
				plain('fixed', 'Fixed in place', { kind: 'switch' })
			];
		case 'feeds':
			return [
				NAME,
				quantity('xUm', 'x', 'um'),
				quantity('yUm', 'y', 'um'),
				choice('net', 'Net', netsOf(floorplan, 'input', 'ground')),
				plain('seriesOhm', 'Series resistance', {
					kind: 'quantity',
					unit: 'ohm',
					check: notNegative
				}),
				positiveQuantity('maxA', 'Current limit', 'A', true)
			];
		case 'blocks':
			return [
				NAME,
				choice('net', 'Net', netsOf(floorplan, 'regulated', 'input')),
				quantity('voltageExponent', 'Voltage exponent', '1'),
				...frameFields(),
				...currentFields(floorplan)
			];
		case 'keepouts':
			return [
				NAME,
				...frameFields(),
				forbidsField('regulators', 'Regulators'),
				forbidsField('straps', 'Straps')
			];
		case 'straps':
			return [
				NAME,
				choice(
					'net',
					'Net',
					floorplan.nets.map(({ id }) => id)
				),
				choice(
					'layer',
					'Layer',
					floorplan.layers.map(({ id }) => id)
				),
				positiveQuantity('pitchUm', 'Pitch', 'um'),
				positiveQuantity('widthUm', 'Width', 'um'),
				quantity('offsetUm', 'Offset', 'um')
			];
		case 'nets':
			return [
				NAME,
				quantity('volts', 'Nominal volts', 'V'),
				choice('groundReference', 'Ground reference', ['local', 'quiet']),
				...(items.every((item) => 'senseLoop' in item) ? [SENSE_RANGE] : [])
			];
		default:
			return [NAME];
	}
}

/** The value that all items have; undefined where they differ, null where none of them has one. */
export function sharedValue(items: readonly object[], { read }: InspectorField): unknown {
	const values = items.map((item) => read(item as InspectedItem) ?? null);
	const isShared = values.length > 0 && values.every((value) => jsonEquals(value, values[0]));
	return isShared ? values[0] : undefined;
}

/** Fields under their headings, in the order in which the headings first occur. */
export function groupFields(
	fields: readonly InspectorField[]
): { readonly title: string; readonly members: readonly InspectorField[] }[] {
	const groups = new Map<string, InspectorField[]>();
	for (const field of fields) {
		const title = field.group ?? '';
		groups.set(title, [...(groups.get(title) ?? []), field]);
	}
	return [...groups].map(([title, members]) => ({ title, members }));
}
