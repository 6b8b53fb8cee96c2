/** Units as labs write them in headers and cells, brought to the reader's own list; what is not recognised stays unrecognised. */
import type { TimeUnit, ValueUnit } from '$lib/schemas/sheet';
import { isTemperatureWord } from './words';

/** "percent": a bare % whose basis has to be asked. "duration": h:mm and the like. */
export type UnitReading =
	| { of: 'value'; unit: ValueUnit }
	| { of: 'percent' }
	| { of: 'time'; unit: TimeUnit }
	| { of: 'duration'; form: 'h:mm' | 'mm:ss' }
	| { of: 'temperature'; unit: 'degC' | 'K' };

const VALUES: [RegExp, ValueUnit][] = [
	[/^(mol\/l|mol\/dm\^?3|kmol\/m\^?3|mol l\^?-1|mol dm\^?-3|mol per l(it(er|re))?|molar)$/i, 'mol/L'],
	[/^(umol\/ml|nmol\/ul|mmol\/l|mol\/m\^?3|mmol l\^?-1|mmol\/dm\^?3)$/i, 'mmol/L'],
	[/^(umol\/l|mmol\/m\^?3|umol l\^?-1)$/i, 'umol/L'],
	[/^(g\/l|kg\/m\^?3|g l\^?-1|g\/dm\^?3)$/i, 'g/L'],
	[/^(mg\/ml|mg ml\^?-1)$/i, 'mg/mL'],
	[/^(mg\/l|ug\/ml|mg l\^?-1)$/i, 'mg/L'],
	[/^((lc|hplc|uplc|gc|uv|rel\.?|peak)[ -]?)?area[ -]?(%|percent|pct\.?|prozent)$/i, 'area %'],
	[/^(%|percent|pct)[ -]?(peak )?area$/i, 'area %'],
	[
		/^(% ?a\/a|a[- ]?%|lcap|flächen?[- ]?(%|prozent)|fl\.?[- ]?%|% ?fläche|aire ?%|% ?(d'|de l')?aire|área ?%|% ?área)$/i,
		'area %'
	],
	[
		/^(%|percent|prozent|mol[ -]?%) ?(of|der|d\.|de la|von|rel\.? to) ?(the )?(charge|initial|start|einwaage|charg(e|é)e?|a0|a 0|feed)$/i,
		'% of charge'
	],
	[/^(%|percent) (charge|initial)$/i, '% of charge'],
	[/^(mol[ -.]{0,2}(%|percent|prozent)|molar ?%|% ?\(?mol(\/mol)?\)?)$/i, 'mol %'],
	[
		/^((mole |molar )?fraction( of (the )?(charge|initial|start|feed))?|mol\/mol|anteil|fraction molaire|fracci[oó]n)$/i,
		'fraction of charge'
	],
	[
		/^(assay )?(% ?\(?(w\/w|m\/m|wt|wt\/wt)\)?|(w\/w|m\/m) ?%|wt\.?[ -]?%|(gew|masse)\.?[- ]?%|weight ?%|mass ?%|assay ?%)$/i,
		'% w/w'
	],
	[
		/^((peak|lc|hplc|uv) ?)?(area|areas|fläche|aire|área|signal|absorbance|extinktion|response)([ ,]*(\(?a\.?u\.?\)?|counts?|m?au[ *·.]?s(ec)?|m?au[ *·.]?min|m?v[ *·.]?s))?$/i,
		'area'
	],
	[
		/^(a\.? ?u\.?|counts?|m?au|m?au[ *·.]?s(ec)?|m?au[ *·.]?min|u?m?v[ *·.]?s(ec)?|arb\.? ?units?|pa[ *·.]?s)$/i,
		'area'
	]
];

/** Short words whose case matters: D, S and H are species far more often than units. */
const EXACT: Record<string, UnitReading> = {
	M: { of: 'value', unit: 'mol/L' },
	mM: { of: 'value', unit: 'mmol/L' },
	uM: { of: 'value', unit: 'umol/L' },
	s: { of: 'time', unit: 's' },
	h: { of: 'time', unit: 'h' },
	d: { of: 'time', unit: 'd' },
	K: { of: 'temperature', unit: 'K' }
};

const TIMES: [RegExp, TimeUnit][] = [
	[/^(sec\.?|secs|seconds?|sek\.?|sekunden?|secondes?|segundos?|secondi)$/i, 's'],
	[/^(min\.?|mins\.?|minutes?|minuten?|minutos?|minuti)$/i, 'min'],
	[/^(hr\.?|hrs\.?|hours?|std\.?|stunden?|heures?|horas?|ore|uur|uren)$/i, 'h'],
	[/^(days?|tage?|jours?|d[ií]as?|giorni|dagen)$/i, 'd']
];

const tidy = (text: string) =>
	text
		.trim()
		.replace(/[\u2212\u2013\u207b]/g, '-')
		.replace(/[µμ]/g, 'u')
		.replace(/[·⋅]/g, ' ')
		.replace(/⁻¹/g, '-1')
		.replace(/[\s\u00a0]+/g, ' ')
		.replace(/ ?\/ ?/g, '/')
		.replace(/³/g, '3')
		.replace(/¹/g, '1');

/** Reads a text that is a unit and nothing else; null when it is not. */
export function readUnit(text: string): UnitReading | null {
	const plain = tidy(text);
	if (plain === '' || plain.length > 40) return null;
	if (plain === '%' || /^(percent|prozent|pour ?cent|pct)$/i.test(plain)) return { of: 'percent' };
	if (Object.hasOwn(EXACT, plain)) return EXACT[plain];
	for (const [test, unit] of TIMES) if (test.test(plain)) return { of: 'time', unit };
	if (/^\[?h{1,2}\]?:m{1,2}(:s{1,2})?$/i.test(plain)) return { of: 'duration', form: 'h:mm' };
	if (/^\[?m{1,2}\]?:s{1,2}$/i.test(plain)) return { of: 'duration', form: 'mm:ss' };
	if (/^(°|deg(rees?)? ?|grad )c(elsius)?$|^celsius$|^℃$/i.test(plain))
		return { of: 'temperature', unit: 'degC' };
	if (/^kelvin$/i.test(plain)) return { of: 'temperature', unit: 'K' };
	for (const [test, unit] of VALUES) if (test.test(plain)) return { of: 'value', unit };
	return null;
}

export interface HeaderParts {
	/** The text without its unit. */
	name: string;
	unit: UnitReading | null;
	/** Text in brackets at the end that is not a unit known here: "HX-14 (A)" gives "A". */
	bracket: string | null;
}

/** Parts a header such as "A (mol/L)", "c(A) [mmol/L]", "t / min", "Time, h", "Zeit in min", "Area %". */
export function splitHeader(text: string): HeaderParts {
	const plain = text.replace(/[\s\u00a0]+/g, ' ').trim();
	const whole = readUnit(plain.replace(/^[([]|[)\]]$/g, ''));
	if (whole && /^[([].*[)\]]$/.test(plain)) return { name: '', unit: whole, bracket: null };
	const bracketed = /^(.*?)[\s/,;:]*[([]([^()[\]]*(?:\([^()]*\)[^()[\]]*)?)[)\]]\s*$/.exec(plain);
	if (bracketed) {
		const unit = readUnit(bracketed[2]) ?? lastWordUnit(bracketed[2]) ?? celsius(bracketed[1], bracketed[2]);
		if (unit) return { name: bracketed[1].trim(), unit, bracket: null };
		const outer = splitTail(bracketed[1].trim());
		return { name: outer.name, unit: outer.unit, bracket: bracketed[2].trim() };
	}
	return { ...splitTail(plain), bracket: null };
}

/** "T (C)": a lone C is degrees only behind a temperature. */
const celsius = (name: string, bracket: string): UnitReading | null =>
	bracket.trim() === 'C' && isTemperatureWord(name) ? { of: 'temperature', unit: 'degC' } : null;

/** "area, a.u." inside brackets: the last part is the unit. */
function lastWordUnit(text: string): UnitReading | null {
	const comma = text.lastIndexOf(',');
	return comma > 0 ? readUnit(text.slice(comma + 1)) : null;
}

function splitTail(text: string): { name: string; unit: UnitReading | null } {
	// "t" alone is a name, "h" alone a unit; a capital alone is a species; "area" alone says what is counted.
	const whole = /^[A-Z]$/.test(text) ? null : readUnit(text);
	if (whole) return { name: whole.of === 'value' || whole.of === 'percent' ? text : '', unit: whole };
	for (const mark of [' / ', '/', ', ', '; ', ' in ', ' - ', ' ']) {
		for (let at = text.indexOf(mark); at > 0; at = text.indexOf(mark, at + 1)) {
			const unit = readUnit(text.slice(at + mark.length));
			const cut = / (of|per|pro|de|del)$/i.test(text.slice(0, at));
			if (unit && !cut && !(mark === '/' && unit.of === 'percent'))
				return { name: text.slice(0, at).trim(), unit };
		}
	}
	const leading = /^(%|LCAP)\s+(.+)$/i.exec(text);
	if (leading) {
		const unit = readUnit(leading[1]);
		if (unit) return { name: leading[2], unit };
	}
	return { name: text, unit: null };
}

/** Seconds in one of the time units. */
export const SECONDS: Record<TimeUnit, number> = { s: 1, min: 60, h: 3600, d: 86_400 };

/** Factor from the unit to mol/L or g/L; null for the others. */
export const MOLAR_FACTOR: Partial<Record<ValueUnit, number>> = { 'mol/L': 1, 'mmol/L': 1000, 'umol/L': 1e6 };
export const MASS_FACTOR: Partial<Record<ValueUnit, number>> = { 'g/L': 1, 'mg/mL': 1, 'mg/L': 1000 };

export const isRelative = (unit: string | null): boolean =>
	unit === 'area %' || unit === '% of charge' || unit === 'mol %' || unit === '% w/w';
