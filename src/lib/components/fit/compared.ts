/** What the comparison page needs of a fit. */
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { parameterName, plainName, type ParameterName } from './words';

export interface ComparedFit {
	id: string;
	number: number | null;
	report: FitReport | null;
	request: FitRequest;
	scheme: { name: string; number: number };
	runs: { requestId: string; name: string; revision: number }[];
}

export interface ComparedParameter {
	key: string;
	name: ParameterName;
	unit: string;
	/** The parameter of each fit; undefined where a fit has none. */
	of: (NonNullable<FitReport['parameters']>[number] | undefined)[];
}

const namesOf = (fit: ComparedFit): Record<string, string> =>
	Object.fromEntries(fit.runs.map((r) => [r.requestId, r.name]));

/** Parameters of all fits by what they are rather than by id, so that k₂ of B → C meets k₂ of B → C. */
export function comparedParameters(fits: ComparedFit[]): ComparedParameter[] {
	const rows = new Map<string, ComparedParameter>();
	fits.forEach((fit, place) =>
		fit.report?.parameters.forEach((p) => {
			const name = parameterName(p.id, fit.request, namesOf(fit));
			const key = `${plainName(name)} ${name.of} ${p.unit}`;
			const row = rows.get(key) ?? { key, name, unit: p.unit, of: fits.map(() => undefined) };
			row.of[place] = p;
			rows.set(key, row);
		})
	);
	return [...rows.values()];
}
