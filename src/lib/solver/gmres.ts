/** What `solveGmres` reached. */
export interface GmresResult {
	readonly iterations: number;
	/** norm(b - A x) / norm(b), by the recurrence. */
	readonly residual: number;
	readonly converged: boolean;
	/**
	 * The answer as a sum over the vectors that `multiply` was given, in that order, where it was
	 * reached from x = 0 without a restart; else null. It spares a caller who keeps more than the
	 * products one last product with x.
	 */
	readonly weights: readonly number[] | null;
}

function dot(a: Float64Array, b: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
	return sum;
}

function addScaled(target: Float64Array, scale: number, source: Float64Array): void {
	for (let i = 0; i < target.length; i++) target[i] += scale * source[i];
}

/**
 * Restarted GMRES with modified Gram-Schmidt and Givens rotations (Saad and Schultz 1986,
 * algorithms 3 and 4) for A x = b with any nonsingular A.
 * @param multiply writes A x into `into`
 * @param b right-hand side
 * @param x start on entry, answer on return
 * @param tolerance on norm(b - A x) / norm(b)
 */
export function solveGmres(
	multiply: (x: Float64Array, into: Float64Array) => void,
	b: Float64Array,
	x: Float64Array,
	{
		tolerance,
		restart,
		maxIterations,
		shouldStop
	}: {
		tolerance: number;
		restart: number;
		maxIterations: number;
		shouldStop?: () => boolean;
	}
): GmresResult {
	const normB = Math.sqrt(dot(b, b));
	if (normB === 0) {
		x.fill(0);
		return { iterations: 0, residual: 0, converged: true, weights: [] };
	}
	const work = new Float64Array(b.length);
	let iterations = 0;
	let residual = Infinity;
	let broken = false;
	let single: readonly number[] | null = null;
	let cycles = 0;
	while (iterations < maxIterations && !broken) {
		// The usual start x = 0 needs no product.
		const isFresh = cycles++ === 0 && x.every((value) => value === 0);
		if (isFresh) work.fill(0);
		else multiply(x, work);
		single = null;
		const first = b.map((value, i) => value - work[i]);
		const beta = Math.sqrt(dot(first, first));
		residual = beta / normB;
		if (residual <= tolerance || shouldStop?.() === true) break;
		for (let i = 0; i < first.length; i++) first[i] /= beta;
		// Basis of the Krylov space, the triangle R by columns, rotations (c, s), and Q^T (beta e1).
		const basis = [first];
		const triangle: number[][] = [];
		const cosine: number[] = [];
		const sine: number[] = [];
		const right = [beta];
		while (triangle.length < restart && iterations < maxIterations) {
			const j = triangle.length;
			const next = new Float64Array(b.length);
			multiply(basis[j], next);
			iterations++;
			const column: number[] = [];
			for (let i = 0; i <= j; i++) {
				column[i] = dot(next, basis[i]);
				addScaled(next, -column[i], basis[i]);
			}
			const norm = Math.sqrt(dot(next, next));
			for (let i = 0; i < j; i++) {
				const upper = cosine[i] * column[i] + sine[i] * column[i + 1];
				column[i + 1] = cosine[i] * column[i + 1] - sine[i] * column[i];
				column[i] = upper;
			}
			const length = Math.hypot(column[j], norm);
			if (length === 0) {
				// A takes the newest direction to nothing: the space cannot grow, the matrix is singular.
				broken = true;
				break;
			}
			cosine[j] = column[j] / length;
			sine[j] = norm / length;
			column[j] = length;
			triangle.push(column);
			right[j + 1] = -sine[j] * right[j];
			right[j] *= cosine[j];
			residual = Math.abs(right[j + 1]) / normB;
			if (residual <= tolerance || norm === 0 || shouldStop?.() === true) break;
			for (let i = 0; i < next.length; i++) next[i] /= norm;
			basis.push(next);
		}
		const weights = triangle.map(() => 0);
		for (let i = triangle.length - 1; i >= 0; i--) {
			let value = right[i];
			for (let j = i + 1; j < triangle.length; j++) value -= triangle[j][i] * weights[j];
			weights[i] = value / triangle[i][i];
			addScaled(x, weights[i], basis[i]);
		}
		if (isFresh) single = weights;
		if (residual <= tolerance) break;
	}
	return { iterations, residual, converged: residual <= tolerance, weights: single };
}
