/** Where the sheets find each other's cells: filled while the sheets are written, in the order of their dependence. */
export interface Layout {
	/** Cell with the engine's value of each parameter, sheet included. */
	si: Map<string, string>;
	runs: {
		/** Row and column of K[0][0] on "Scheme". */
		matrix: { row: number; column: number };
		/** Charge of each species in mol/L, on "Verify", sheet included. */
		charge: string[];
		/** Concentration of each species from the constants, per time, on "Verify", sheet included. */
		concentration: string[][];
		/** Shifted time, per time. */
		time: string[];
	}[];
	/** One cell a sheet that says whether everything on it still agrees. */
	checks: { sheet: string; cell: string; agrees: boolean }[];
}

export const emptyLayout = (): Layout => ({ si: new Map(), runs: [], checks: [] });

export const SHEETS = {
	cover: 'Cover',
	signatures: 'Signatures',
	scheme: 'Scheme',
	received: 'Data as received',
	used: 'Data as used',
	parameters: 'Parameters',
	curves: 'Curves',
	verify: 'Verify',
	residuals: 'Residuals',
	decisions: 'Decisions',
	cautions: 'Cautions',
	recipe: 'Recipe',
	versions: 'Versions',
	fits: 'Fits',
	audit: 'Audit extract',
	assumptions: 'Assumptions'
} as const;

/** Agreement asked for between what is recalculated and what is stored. */
export const TOLERANCE = 1e-9;
