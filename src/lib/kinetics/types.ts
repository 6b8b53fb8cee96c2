/**
 * The words of the engine. Everything inside is SI: seconds, mol/L, kelvin, J/mol, 1/s.
 * Units are converted at the edge (`units.ts`, `from-scheme.ts`), never in here.
 */

export type SpeciesRole = 'starting material' | 'intermediate' | 'product' | 'impurity' | 'reagent in excess';

export interface Species {
	id: string;
	name: string;
	role?: SpeciesRole;
	molarMassGPerMol?: number;
}

/** A species held constant within a run, raised to its order in the rate law of a step. */
export interface ExcessOrder {
	species: string;
	order: number;
}

/**
 * k(T) of one direction of a step.
 * Arrhenius: k = kRef · exp(−Ea/R · (1/T − 1/Tref)) · Π [X]^order, kRef in 1/s (per (mol/L)^order of each excess species).
 * Eyring: k = kRef · (T/Tref) · exp(−ΔH‡/R · (1/T − 1/Tref)) · Π [X]^order; `energyJPerMol` is then ΔH‡.
 */
export interface RateLaw {
	form: 'arrhenius' | 'eyring';
	kRefPerS: number;
	energyJPerMol: number;
	excess: ExcessOrder[];
}

/** Reverse direction through the equilibrium constant K = k_forward / k_reverse with van 't Hoff: K(T) = KRef · exp(−ΔH°/R · (1/T − 1/Tref)). */
export interface EquilibriumLaw {
	form: 'equilibrium';
	kEqRef: number;
	enthalpyJPerMol: number;
}

export interface Product {
	species: string;
	coefficient: number;
}

export interface Step {
	id: string;
	reactant: string;
	/** Empty: a loss, "to nothing we assay". */
	products: Product[];
	forward: RateLaw;
	/** Only a step with exactly one product of coefficient 1 may be reversible. */
	reverse: RateLaw | EquilibriumLaw | null;
}

export interface Network {
	species: Species[];
	steps: Step[];
	referenceTemperatureK: number;
}

export interface Conditions {
	temperatureK: number;
	/** mol/L of every species in excess that a rate law names. */
	excessMolPerL: Record<string, number>;
}

/** What a check found, tied to the species or step that it concerns. */
export interface NetworkIssue {
	level: 'stop' | 'caution' | 'note';
	code:
		| 'species-unknown'
		| 'species-duplicate'
		| 'step-dangling'
		| 'step-to-itself'
		| 'step-duplicate'
		| 'constant-invalid'
		| 'coefficient-invalid'
		| 'reversible-not-one-to-one'
		| 'mass-imbalance'
		| 'species-unreached'
		| 'species-in-no-step'
		| 'detailed-balance-broken'
		| 'excess-too-small'
		| 'excess-missing'
		| 'charge-invalid'
		| 'unit-invalid';
	message: string;
	speciesId?: string;
	stepId?: string;
	/** For `detailed-balance-broken`: product of forward over product of reverse constants round the cycle. */
	ratio?: number;
}

/** Rate constants of every step under one set of conditions, in step order, 1/s. `reverse[i]` is 0 for an irreversible step. */
export interface RateConstants {
	forward: Float64Array;
	reverse: Float64Array;
}

/**
 * The linear system dc/dt = K c as its flows, kept apart from K so that the diagonal is never formed by cancelling.
 * `transfers`: rate · coefficient goes into K[to][from]. `outflow[i]`: total first-order consumption of species i (−K[i][i]).
 */
export interface LinearSystem {
	n: number;
	transfers: {
		from: number;
		to: number;
		rate: number;
		coefficient: number;
		step: number;
		direction: 'forward' | 'reverse';
	}[];
	outflow: Float64Array;
	/** Each step-direction that carries anything, once, losses included: `rate` leaves `from`. Absent in hand-made systems. */
	flows?: { step: number; direction: 'forward' | 'reverse'; from: number; rate: number }[];
}

export type SolveMethod =
	| 'triangular' // no cycles: eigenvalues are diagonal entries
	| 'symmetrised' // blocks in detailed balance, one-sided Jacobi
	| 'general' // balanced general eigen-solver in at least one block
	| 'confluent' // at least one group of equal or nearly equal coupled rates
	| 'uniformisation' // non-negative scaling and squaring, last resort
	| 'extended'; // decided in extended precision

/** One mode (or one group of coupled equal rates) of the closed form. */
export interface Mode {
	/** 1/s; `re` ≤ 0. */
	re: number;
	im: number;
	/** How many times the rate is repeated in a coupled group; 1 for a simple mode. */
	multiplicity: number;
	/** −1/re in s; Infinity for the final composition. */
	timeConstantS: number;
	/** ln 2/|re| in s; Infinity for the final composition. */
	halfLifeS: number;
	/**
	 * Amplitude per species for this charge, mol/L, in species order.
	 * Real simple mode: `amplitudes[0]` multiplies e^{re·t}.
	 * Complex pair (im > 0): [0] multiplies e^{re·t}cos(im·t), [1] multiplies e^{re·t}sin(im·t).
	 * Repeated mode: [m] multiplies t^m e^{re·t} (unit mol/L/s^m). A group of rates that nearly agree has further powers, small.
	 * Repeated complex pair: [2m] multiplies t^m e^{re·t}cos(im·t), [2m + 1] multiplies t^m e^{re·t}sin(im·t).
	 */
	amplitudes: Float64Array[];
}

/** The closed-form solution for one charge under constant conditions. */
export interface Solution {
	readonly n: number;
	readonly charge: Float64Array;
	readonly modes: Mode[];
	readonly method: SolveMethod;
	/** A-posteriori bound on the error of any species at any time, as a fraction of the total charge. */
	readonly errorEstimate: number;
	/** Limit t → ∞, mol/L; Infinity for a species that a constant feed piles up without limit. */
	readonly final: Float64Array;
	/** Concentrations at one time; exact charge at t = 0. Writes into `out` (length n) when given. */
	at(timeS: number, out?: Float64Array): Float64Array;
	/** All species at many times, times-major: out[k·n + i] is species i at timesS[k]. */
	curves(timesS: ArrayLike<number>, out?: Float64Array): Float64Array;
	/** dc/dt at one time, mol/L/s. */
	slope(timeS: number, out?: Float64Array): Float64Array;
	/** ∫₀ᵗ c dt, mol/L·s; at t = Infinity the throughput, itself Infinity where material stays for good. */
	integral(timeS: number, out?: Float64Array): Float64Array;
}
