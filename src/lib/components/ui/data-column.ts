/** A column: what a row holds there, for sorting, filtering and export, and as text for people. */
export interface DataColumn<Row> {
	readonly id: string;
	readonly header: string;
	/** Unit of the values, shown in the head; the cells then hold figures alone. */
	readonly unit?: string;
	readonly value: (row: Row) => string | number | null;
	/** Default: the value itself, numbers with `decimals` places. */
	readonly text?: (row: Row) => string;
	readonly isNumeric?: boolean;
	/** Decimal places of a numeric column. */
	readonly decimals?: number;
}

/** Shown where there is no value. */
const NONE = '–';

/** What people read in a cell. */
export function cellText<Row>(row: Row, column: DataColumn<Row>): string {
	if (column.text) return column.text(row);
	const value = column.value(row);
	if (value === null) return NONE;
	if (typeof value === 'string') return value;
	if (!Number.isFinite(value)) return NONE;
	return value
		.toFixed(column.decimals ?? 0)
		.replace(/^-(?=0(?:\.0*)?$)/, '')
		.replace('-', '−');
}

export function headText<Row>({ header, unit }: DataColumn<Row>): string {
	return unit ? `${header} (${unit})` : header;
}

/** A text as filters compare it: capitals and hyphens make no difference ("dropout", "drop-out"). */
export function searchable(text: string): string {
	return text.toLowerCase().replaceAll('-', '');
}
