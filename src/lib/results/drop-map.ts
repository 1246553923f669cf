/**
 * A raster of one net over the die, for the map. Row 0 is the bottom row; cell (column, row) has
 * its centre at origin + (column + 0.5, row + 0.5) * cell. Every plane holds columns * rows values,
 * row by row. A cell holds the value of one node, never an interpolation, and NaN where the net has
 * no rail within reach or the cell's centre lies outside the die.
 */
export interface DropMap {
	readonly columns: number;
	readonly rows: number;
	/** Lower left corner of cell (0, 0), integer nm. */
	readonly originXNm: number;
	readonly originYNm: number;
	/** Side of a cell, integer nm. */
	readonly cellNm: number;
	/** Nominal volts minus what a load there sees, V: the sum of the next two. */
	readonly dropV: Float32Array;
	/** Nominal volts minus the net's own voltage, V. */
	readonly netDropV: Float32Array;
	/** Rise of the local ground above 0 V, V. */
	readonly groundRiseV: Float32Array;
}

/** "MWDM", read as a little-endian 32-bit number. */
const MAP_MAGIC = 0x4d44574d;
const MAP_VERSION = 1;
/** Magic, version, columns, rows, originX, originY, cell: seven 32-bit numbers. */
const HEADER_BYTES = 28;
const PLANES = ['dropV', 'netDropV', 'groundRiseV'] as const;

/**
 * The map as bytes: a header of seven little-endian 32-bit integers (magic "MWDM", version,
 * columns, rows, originXNm, originYNm, cellNm), then the planes dropV, netDropV and groundRiseV as
 * little-endian 32-bit floats.
 */
export function encodeDropMap(map: DropMap): Uint8Array<ArrayBuffer> {
	const cells = map.columns * map.rows;
	const bytes = new Uint8Array(HEADER_BYTES + PLANES.length * cells * 4);
	const view = new DataView(bytes.buffer);
	view.setUint32(0, MAP_MAGIC, true);
	[MAP_VERSION, map.columns, map.rows, map.originXNm, map.originYNm, map.cellNm].forEach(
		(value, index) => view.setInt32(4 + index * 4, value, true)
	);
	let offset = HEADER_BYTES;
	for (const plane of PLANES) {
		const values = map[plane];
		for (let cell = 0; cell < cells; cell++, offset += 4) {
			view.setFloat32(offset, values[cell], true);
		}
	}
	return bytes;
}

/** Reads what `encodeDropMap` wrote; null where the bytes are something else or cut short. */
export function decodeDropMap(bytes: Uint8Array): DropMap | null {
	if (bytes.byteLength < HEADER_BYTES) return null;
	const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
	if (view.getUint32(0, true) !== MAP_MAGIC || view.getInt32(4, true) !== MAP_VERSION) return null;
	const columns = view.getInt32(8, true);
	const rows = view.getInt32(12, true);
	const cells = columns * rows;
	if (columns <= 0 || rows <= 0) return null;
	if (bytes.byteLength !== HEADER_BYTES + PLANES.length * cells * 4) return null;
	const [dropV, netDropV, groundRiseV] = PLANES.map((_, plane) => {
		const values = new Float32Array(cells);
		const start = HEADER_BYTES + plane * cells * 4;
		for (let cell = 0; cell < cells; cell++) values[cell] = view.getFloat32(start + cell * 4, true);
		return values;
	});
	return {
		columns,
		rows,
		originXNm: view.getInt32(16, true),
		originYNm: view.getInt32(20, true),
		cellNm: view.getInt32(24, true),
		dropV,
		netDropV,
		groundRiseV
	};
}
