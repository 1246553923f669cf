/** A list of 32-bit integers that grows; `toArray` gives exactly what was pushed. */
export class IntBuffer {
	#values = new Int32Array(1024);
	#length = 0;

	get length(): number {
		return this.#length;
	}

	push(value: number): void {
		if (this.#length === this.#values.length) {
			const grown = new Int32Array(this.#values.length * 2);
			grown.set(this.#values);
			this.#values = grown;
		}
		this.#values[this.#length++] = value;
	}

	toArray(): Int32Array {
		return this.#values.slice(0, this.#length);
	}
}
