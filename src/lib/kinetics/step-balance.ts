/**
 * What keeps the squarings of `StepPropagator` true however fast a step is: the diagonals of e^{Kh} and of its derivatives are
 * rebuilt from what stays and what has left.
 *
 * Problem: each squaring rounds, and an error in the mass of a column doubles with every later one: ε q h in the end, 4e-8 at
 * q h = 1e8. In a block of the flow (species that turn into each other and back, one to one) the mass of a column is known:
 *
 *     Σ_i E_ij + x_j = 1,   Σ_i L_ij + ∂x_j = 0            (i over the block; x: what has left the block by then)
 *     x ← x + x E,          ∂x ← ∂x + ∂x E + x L           with each squaring, from Σ_m of the row (exits) Aᵐ/(m+1)! …
 *
 * so that E_jj and L_jj are what is left over, or, where little of the column stays with j, the column is divided by its total.
 * A single species has E_jj = e^{−kh} and L_jj = −k_d h e^{−kh}, k what leaves it. Blocks with coefficients other than 1 are left as they are.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | x, ∂x | `x`, `dx` (one row per rate) |
 * | E, L | `e`, `l` of `StepPropagator`, species in the order of flow |
 *
 * Source: diagonals from what leaves, Grassmann, Taksar & Heyman, Oper. Res. 33 (1985) 1107; Xue & Ye, Numer. Math. 124 (2013)
 * 393. For the derivatives the same identities, differentiated.
 */

/** One step-direction: what it takes from and what it gives. A product that is the reactant itself stays where it is. */
export interface Direction {
	from: number;
	products: { to: number; coefficient: number }[];
}

export interface FlowPlaces {
	/** Place of each species in the order of flow. */
	place: number[];
	/** Where the block of each place begins and ends. */
	begin: Int32Array;
	end: Int32Array;
}

export class StepBalance {
	private readonly x: Float64Array;
	private readonly xTerm: Float64Array;
	private readonly dx: Float64Array;
	private readonly dxTerm: Float64Array;
	private readonly spare: Float64Array;
	private readonly exits: Float64Array;
	/** Whether the block of a place keeps its mass: one to one within. */
	private readonly keeps: Uint8Array;
	/** Whether a direction leaves the block of its reactant altogether. */
	private readonly leaves: Uint8Array;

	constructor(
		private readonly n: number,
		private readonly directions: Direction[],
		private readonly rates: number[],
		private readonly places: FlowPlaces
	) {
		this.x = new Float64Array(n);
		this.xTerm = new Float64Array(n);
		this.dx = new Float64Array(rates.length * n);
		this.dxTerm = new Float64Array(rates.length * n);
		this.spare = new Float64Array(n);
		this.exits = new Float64Array(n);
		this.keeps = new Uint8Array(n).fill(1);
		this.leaves = new Uint8Array(directions.length);
		const { place, begin } = places;
		directions.forEach(({ from, products }, d) => {
			const block = begin[place[from]];
			const within = products.filter((p) => p.coefficient !== 0 && begin[place[p.to]] === block);
			if (within.length === 0) this.leaves[d] = 1;
			else if (within.length > 1 || within[0].coefficient !== 1) this.keeps[block] = 0;
		});
		for (let j = 0; j < n; j++) this.keeps[j] = this.keeps[begin[j]];
	}

	/** Before the series. */
	begin(constants: Float64Array): void {
		this.x.fill(0);
		this.xTerm.fill(0);
		this.dx.fill(0);
		this.dxTerm.fill(0);
		this.exits.fill(0);
		this.directions.forEach(({ from }, d) => {
			if (this.leaves[d]) this.exits[this.places.place[from]] += constants[d];
		});
	}

	/** Term m of x and ∂x, from term m − 1 of E (`term`) and of L (`lTerm`); `q` and `scaled` as in `StepPropagator`. */
	addTerm(
		constants: Float64Array,
		q: number,
		scaled: number,
		m: number,
		term: Float64Array,
		lTerm: Float64Array
	): void {
		const { n, x, xTerm, dx, dxTerm, exits, rates, directions, leaves } = this;
		const { place, begin, end } = this.places;
		const h = scaled / m;
		for (let r = 0; r < rates.length; r++) {
			const at = place[directions[rates[r]].from];
			const own = leaves[rates[r]] ? constants[rates[r]] : 0;
			for (let j = begin[at]; j < end[at]; j++) {
				let sum = q * dxTerm[r * n + j] + own * term[at * n + j];
				for (let i = begin[at]; i < end[at]; i++) sum += exits[i] * lTerm[(r * n + i) * n + j];
				dxTerm[r * n + j] = sum * h;
				dx[r * n + j] += sum * h;
			}
		}
		for (let j = 0; j < n; j++) {
			let sum = q * xTerm[j];
			for (let i = begin[j]; i < end[j]; i++) sum += exits[i] * term[i * n + j];
			xTerm[j] = sum * h;
			x[j] += xTerm[j];
		}
	}

	/** After the series: the factor e^{−q h} of x and ∂x. */
	damp(factor: number): void {
		for (let i = 0; i < this.x.length; i++) this.x[i] *= factor;
		for (let i = 0; i < this.dx.length; i++) this.dx[i] *= factor;
	}

	/** x and ∂x of twice the interval; call before E and L are squared. */
	double(e: Float64Array, l: Float64Array): void {
		const { n, x, dx, rates, directions, spare } = this;
		const { place, begin, end } = this.places;
		for (let r = 0; r < rates.length; r++) {
			const at = place[directions[rates[r]].from];
			for (let j = begin[at]; j < end[at]; j++) {
				let sum = dx[r * n + j];
				for (let i = begin[at]; i < end[at]; i++)
					sum += dx[r * n + i] * e[i * n + j] + x[i] * l[(r * n + i) * n + j];
				spare[j] = sum;
			}
			for (let j = begin[at]; j < end[at]; j++) dx[r * n + j] = spare[j];
		}
		for (let j = 0; j < n; j++) {
			let sum = x[j];
			for (let i = begin[j]; i < end[j]; i++) sum += x[i] * e[i * n + j];
			spare[j] = sum;
		}
		x.set(spare);
	}

	/** Whether every block of several species keeps its mass. */
	get all(): boolean {
		return this.keeps.every((kept, j) => kept === 1 || this.places.end[j] - this.places.begin[j] === 1);
	}

	/** Rebuilds the diagonals of E and L for the interval h. */
	rebuild(constants: Float64Array, h: number, e: Float64Array, l: Float64Array): void {
		const { n, keeps } = this;
		const { begin, end } = this.places;
		for (let j = 0; j < n; j++) {
			if (end[j] - begin[j] === 1) this.single(j, h, e);
			else if (keeps[j]) this.column(j, e);
		}
		this.derivatives(constants, h, e, l);
	}

	private single(j: number, h: number, e: Float64Array): void {
		e[j * this.n + j] = Math.exp(-this.exits[j] * h);
		this.x[j] = -Math.expm1(-this.exits[j] * h);
	}

	private column(j: number, e: Float64Array): void {
		const { n, x } = this;
		const { begin, end } = this.places;
		let others = x[j];
		for (let i = begin[j]; i < end[j]; i++) if (i !== j) others += e[i * n + j];
		if (others <= 0.5) {
			e[j * n + j] = 1 - others;
			return;
		}
		const total = others + e[j * n + j];
		x[j] /= total;
		for (let i = begin[j]; i < end[j]; i++) e[i * n + j] /= total;
	}

	private derivatives(constants: Float64Array, h: number, e: Float64Array, l: Float64Array): void {
		const { n, dx, rates, directions, keeps, leaves } = this;
		const { place, begin, end } = this.places;
		for (let r = 0; r < rates.length; r++) {
			const at = place[directions[rates[r]].from];
			const block = r * n * n;
			if (end[at] - begin[at] === 1) {
				l[block + at * n + at] = leaves[rates[r]] ? -constants[rates[r]] * h * e[at * n + at] : 0;
				dx[r * n + at] = -l[block + at * n + at];
				continue;
			}
			if (!keeps[at]) continue;
			for (let j = begin[at]; j < end[at]; j++) {
				let sum = dx[r * n + j];
				for (let i = begin[at]; i < end[at]; i++) if (i !== j) sum += l[block + i * n + j];
				l[block + j * n + j] = -sum;
			}
		}
	}
}
