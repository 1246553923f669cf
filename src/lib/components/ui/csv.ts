/** Characters that make a spreadsheet take a cell for a formula. */
const FORMULA_START = /^[=+\-@\t\r]/;

function csvCell(value: string | number | null): string {
	if (value === null) return '';
	if (typeof value === 'number') return Number.isFinite(value) ? String(value) : '';
	const neutral = FORMULA_START.test(value) ? `'${value}` : value;
	return /[",\r\n]/.test(neutral) ? `"${neutral.replaceAll('"', '""')}"` : neutral;
}

/**
 * A table as CSV (RFC 4180): CRLF line ends, quotes doubled. Texts that a spreadsheet would take for
 * a formula are made plain; numbers stay numbers, negative ones too.
 */
export function tableCsv(
	headers: readonly string[],
	rows: readonly (readonly (string | number | null)[])[]
): string {
	return [headers, ...rows].map((row) => `${row.map(csvCell).join(',')}\r\n`).join('');
}
