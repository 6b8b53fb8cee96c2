/**
 * Memory for numbers that live no longer than one call. Closed forms are made thousands of times in a fit and at every movement
 * of a slider; allocating their intermediate matrices would cost more than filling them.
 */
export class Scratch {
	private memory = new Float64Array(0);

	/** At least `length` zeros, the same memory at every call: what an earlier call got is overwritten. */
	zeros(length: number): Float64Array {
		if (this.memory.length < length) this.memory = new Float64Array(length);
		else this.memory.fill(0, 0, length);
		return this.memory;
	}

	/** The same without the zeros. */
	room(length: number): Float64Array {
		if (this.memory.length < length) this.memory = new Float64Array(length);
		return this.memory;
	}
}
