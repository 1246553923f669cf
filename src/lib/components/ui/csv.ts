/** Characters that make a spreadsheet take a cell for a formula. */
const FORMULA_START = /^[=+\-@\t\r]/;

export type TableValue = string | number | null;

/** A value as plain text: texts that a spreadsheet would take for a formula get a leading quote. */
function plain(value: TableValue): string {
	if (value === null) return '';
	if (typeof value === 'number') return Number.isFinite(value) ? String(value) : '';
	return FORMULA_START.test(value) ? `'${value}` : value;
}

function csvCell(value: TableValue): string {
	const text = plain(value);
	return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

/**
 * A table as CSV (RFC 4180): CRLF line ends, quotes doubled. Texts that a spreadsheet would take for
 * a formula are made plain; numbers stay numbers, negative ones too.
 */
export function tableCsv(
	headers: readonly string[],
	rows: readonly (readonly TableValue[])[]
): string {
	return [headers, ...rows].map((row) => `${row.map(csvCell).join(',')}\r\n`).join('');
}

/** A table for the clipboard: cells parted by tabs, as spreadsheets paste them. */
export function tableTsv(
	headers: readonly string[],
	rows: readonly (readonly TableValue[])[]
): string {
	return [headers, ...rows]
		.map((row) => `${row.map((value) => plain(value).replace(/[\t\r\n]+/g, ' ')).join('\t')}\n`)
		.join('');
}
