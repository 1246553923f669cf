import type { ConflictPlace } from '#lib/editor/sync/index.ts';
import { formatQuantity, type Unit } from '#lib/units/index.ts';

/** Units by the ending of a field's name, as documents write them. */
const UNITS: readonly (readonly [ending: RegExp, unit: Unit])[] = [
	[/Um$/, 'um'],
	[/Ohm$/, 'ohm'],
	[/(V|^volts)$/, 'V'],
	[/A$/, 'A'],
	[/C$/, 'degC']
];
const MOST_CHARACTERS = 80;

const NAMES: Readonly<Record<string, string>> = {
	layers: 'layer',
	vias: 'via rule',
	nets: 'net',
	straps: 'strap pattern',
	feeds: 'bump',
	cells: 'cell',
	regulators: 'regulator',
	blocks: 'block',
	keepouts: 'keep-out',
	modes: 'mode',
	corners: 'corner'
};

/** "regulator R1, offset": what two people changed. */
export function placeWords({ list, id, field, property }: ConflictPlace): string {
	if (list === undefined || id === undefined) return property ?? 'the floorplan';
	const item = `${NAMES[list] ?? list} ${id}`;
	return field === undefined ? item : `${item}, ${fieldWords(field)}`;
}

/** "seriesOhm" as "series": the unit stands with the value. */
function fieldWords(field: string): string {
	const stem = field.replace(/(Um|Ohm|V|A|C)$/, '');
	return stem.replace(/[A-Z]/g, (letter) => ` ${letter.toLowerCase()}`).trim();
}

/** A value of a conflict for people. */
export function valueWords({ field }: ConflictPlace, value: unknown): string {
	if (value === undefined) return field === undefined ? 'removed' : 'none';
	if (value === null) return 'none';
	if (typeof value === 'boolean') return value ? 'yes' : 'no';
	if (typeof value === 'number') {
		const unit = UNITS.find(([ending]) => ending.test(field ?? ''))?.[1] ?? '1';
		return formatQuantity(value, unit, { digits: 7 });
	}
	const text = typeof value === 'string' ? value : JSON.stringify(value);
	return text.length > MOST_CHARACTERS ? `${text.slice(0, MOST_CHARACTERS - 1)}…` : text;
}
