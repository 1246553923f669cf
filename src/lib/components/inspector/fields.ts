import { ORIENTATIONS, jsonEquals, type Floorplan, type ItemList } from '#lib/floorplan/index.ts';
import type { Unit } from '#lib/units/index.ts';

/** A field of an item that the inspector offers. */
export type InspectorField =
	| {
			readonly kind: 'quantity';
			readonly name: string;
			readonly label: string;
			readonly unit: Unit;
			readonly isOptional?: boolean;
	  }
	| {
			readonly kind: 'choice';
			readonly name: string;
			readonly label: string;
			readonly options: readonly { readonly value: string; readonly label: string }[];
	  }
	| { readonly kind: 'switch'; readonly name: string; readonly label: string };

function quantity(name: string, label: string, unit: Unit, isOptional = false): InspectorField {
	return { kind: 'quantity', name, label, unit, isOptional };
}

function choice(name: string, label: string, ids: readonly string[]): InspectorField {
	return { kind: 'choice', name, label, options: ids.map((id) => ({ value: id, label: id })) };
}

function netIds({ nets }: Floorplan, ...kinds: string[]): string[] {
	return nets.filter(({ kind }) => kinds.includes(kind)).map(({ id }) => id);
}

/** The fields that items of a list have in common. */
export function fieldsOf(list: ItemList, floorplan: Floorplan): InspectorField[] {
	switch (list) {
		case 'regulators':
			return [
				quantity('xUm', 'x', 'um'),
				quantity('yUm', 'y', 'um'),
				choice(
					'cell',
					'Cell',
					floorplan.cells.map(({ id }) => id)
				),
				choice('orient', 'Orientation', ORIENTATIONS),
				choice('output', 'Output net', netIds(floorplan, 'regulated')),
				{
					kind: 'choice',
					name: 'input',
					label: 'Input net',
					options: [
						...netIds(floorplan, 'input').map((id) => ({ value: id, label: id })),
						{ value: 'null', label: 'ideal' }
					]
				},
				quantity('offsetV', 'Offset', 'V'),
				{ kind: 'switch', name: 'enabled', label: 'In service' },
				{ kind: 'switch', name: 'fixed', label: 'Fixed in place' }
			];
		case 'feeds':
			return [
				quantity('xUm', 'x', 'um'),
				quantity('yUm', 'y', 'um'),
				choice('net', 'Net', netIds(floorplan, 'input', 'ground')),
				quantity('seriesOhm', 'Series resistance', 'ohm'),
				quantity('maxA', 'Current limit', 'A', true)
			];
		case 'blocks':
			return [
				choice('net', 'Net', netIds(floorplan, 'regulated', 'input')),
				quantity('voltageExponent', 'Voltage exponent', '1')
			];
		case 'straps':
			return [
				choice(
					'layer',
					'Layer',
					floorplan.layers.map(({ id }) => id)
				),
				quantity('pitchUm', 'Pitch', 'um'),
				quantity('widthUm', 'Width', 'um'),
				quantity('offsetUm', 'Offset', 'um')
			];
		default:
			return [];
	}
}

/** The value that all items have in a field; undefined where they differ, null where none has it. */
export function sharedValue(items: readonly object[], field: string): unknown {
	const values = items.map((item): unknown => Reflect.get(item, field));
	if (values.length === 0 || values.some((value) => !jsonEquals(value, values[0])))
		return undefined;
	return values[0] ?? null;
}
