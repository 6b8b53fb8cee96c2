import { duration, plain } from '$lib/recipe/rounding';
import type { Operation, Range, RecipeState, SetPoint } from '$lib/schemas/recipe';

/** "39 – 41", "≥ 39", "–" */
export function rangeText(range: Range | null): string {
	if (!range || (range[0] === null && range[1] === null)) return '–';
	if (range[0] === null) return `≤ ${range[1]}`;
	if (range[1] === null) return `≥ ${range[0]}`;
	return `${range[0]} – ${range[1]}`;
}

/** "3.06 h, at most 3.9 h" */
export function durationText(o: Operation): string {
	const set = o.durationMin === null ? '' : duration(o.durationMin);
	const most = o.maxDurationMin === null ? '' : `at most ${duration(o.maxDurationMin)}`;
	return [set, most].filter(Boolean).join(', ') || 'no duration';
}

/** "20 → 40 °C", "40 °C" */
export function temperatureText(o: Operation): string {
	if (o.fromC === null && o.toC === null) return '';
	if (o.toC === null) return `from ${o.fromC} °C`;
	if (o.fromC === null) return `to ${o.toC} °C`;
	if (o.fromC === o.toC) return `${o.toC} °C`;
	return `${o.fromC} → ${o.toC} °C`;
}

export const setPointText = (p: SetPoint): string => `${plain(p.value, 4)} ${p.unit}`;

export const stateKind = (state: RecipeState): 'plain' | 'attention' | 'active' | 'refused' =>
	(
		({
			draft: 'plain',
			'in review': 'attention',
			returned: 'refused',
			validated: 'active',
			superseded: 'plain',
			withdrawn: 'refused'
		}) as const
	)[state];

/** Mass as people weigh it: 12.5 kg, 340 g, 2.5 g. */
export function massText(kg: number | null): string {
	if (kg === null) return '–';
	return kg >= 1 ? `${plain(kg, 4)} kg` : `${plain(kg * 1000, 4)} g`;
}
export function volumeText(litres: number | null): string {
	if (litres === null) return '–';
	return litres >= 1 ? `${plain(litres, 4)} L` : `${plain(litres * 1000, 4)} mL`;
}

export const MEASURE_NAMES = {
	limiting: 'limiting material',
	equivalents: 'equivalents',
	volumes: 'volumes (L/kg)',
	weight: 'weight (kg/kg)',
	'fill to': 'fill up to mol/L'
} as const;

/** Sentence under the title: where the figures come from. */
export function basisText(basis: {
	fitNumber: number;
	schemeName: string;
	schemeNumber: number;
	runs: { number: number }[];
	windowNumber: number | null;
	studiedTemperatureC: Range | null;
	studiedChargeMolPerL: Record<string, Range>;
}): string {
	const runs = basis.runs.map((r) => r.number);
	const list =
		runs.length > 1 ? `runs ${runs.slice(0, -1).join(', ')} and ${runs.at(-1)}` : `run ${runs[0] ?? '–'}`;
	const window = basis.windowNumber === null ? '' : `, window ${basis.windowNumber}`;
	const span = (r: Range | null | undefined, unit: string) => {
		if (!r || r[0] === null || r[1] === null) return '';
		return r[0] === r[1] ? `at ${plain(r[0], 4)} ${unit}` : `${plain(r[0], 4)} to ${plain(r[1], 4)} ${unit}`;
	};
	const [charge] = Object.values(basis.studiedChargeMolPerL).filter((r) => (r[1] ?? 0) > 0);
	const studied = [span(basis.studiedTemperatureC, '°C'), span(charge, 'mol/L')]
		.filter(Boolean)
		.join(' and ');
	return `From fit ${basis.fitNumber} (${basis.schemeName} v${basis.schemeNumber}, ${list})${window}${studied ? `, studied ${studied}` : ''}.`;
}
