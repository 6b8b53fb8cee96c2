/**
 * Words and symbols for a fit's parameters, from their ids (`s2.reverse.kRef`, `r1.initial.A`, …), so that every
 * page names a constant alike: k with the number of its step, minus for the reverse direction.
 */
import type { SchemeContent, StepContent } from '../schemas/scheme';

export interface ParameterName {
	/** Letter, set in italics. */
	letter: string;
	subscript: string;
	/** What the constant belongs to: "B → C", "charge, run 2". */
	of: string;
	kind:
		| 'rate constant'
		| 'equilibrium constant'
		| 'energy'
		| 'charge'
		| 'response factor'
		| 'time offset'
		| 'other';
}

const amount = (coefficient: number): string => (coefficient === 1 ? '' : `${coefficient} `);

/** "B → C", "A → B + 2 C", "A → (not assayed)". */
export function stepWords(step: StepContent, reverse = false): string {
	const right =
		step.products.map((p) => `${amount(p.coefficient)}${p.species}`).join(' + ') || '(not assayed)';
	return reverse ? `${right} → ${step.reactant}` : `${step.reactant} → ${right}`;
}

function ofStep(id: string, scheme: SchemeContent): ParameterName | null {
	const match = /^(.+)\.(forward|reverse)\.(\w+)$/.exec(id);
	if (!match) return null;
	const [, stepId, direction, quantity] = match;
	const index = scheme.steps.findIndex((s) => s.id === stepId);
	if (index < 0) return null;
	const reverse = direction === 'reverse';
	const subscript = `${reverse ? '−' : ''}${index + 1}`;
	const of = stepWords(scheme.steps[index], reverse);
	if (quantity === 'kRef') return { letter: 'k', subscript, of, kind: 'rate constant' };
	if (quantity === 'equilibriumConstant')
		return {
			letter: 'K',
			subscript: String(index + 1),
			of: stepWords(scheme.steps[index]),
			kind: 'equilibrium constant'
		};
	if (quantity === 'enthalpy') return { letter: 'ΔH', subscript: String(index + 1), of, kind: 'energy' };
	return quantity === 'activationEnergy' ? { letter: 'E', subscript, of, kind: 'energy' } : null;
}

/** A constant or response factor that one run has for itself: "k₁" of "A → B, run 2". */
function ofRun(id: string, scheme: SchemeContent, runNames: Record<string, string>): ParameterName | null {
	const constant = /^([^.]+)\.([^.]+\.(?:forward|reverse))\.([kK])$/.exec(id);
	if (constant) {
		const [, run, direction, letter] = constant;
		const shared = ofStep(`${direction}.${letter === 'k' ? 'kRef' : 'equilibriumConstant'}`, scheme);
		return shared && { ...shared, of: `${shared.of}, ${runNames[run] ?? run}` };
	}
	const factor = /^([^.]+)\.([^.]+)\.responseFactor$/.exec(id);
	if (!factor) return null;
	const [, run, channel] = factor;
	const of = `response of ${channel}, ${runNames[run] ?? run}`;
	return { letter: 'f', subscript: channel, of, kind: 'response factor' };
}

/** `runNames` maps the run's id inside the fit to what people call it. */
export function parameterName(
	id: string,
	scheme: SchemeContent,
	runNames: Record<string, string> = {}
): ParameterName {
	const found = ofStep(id, scheme) ?? ofRun(id, scheme, runNames);
	if (found) return found;
	const charge = /^(.+)\.initial\.(.+)$/.exec(id);
	if (charge)
		return {
			letter: charge[2],
			subscript: '0',
			of: `charge, ${runNames[charge[1]] ?? charge[1]}`,
			kind: 'charge'
		};
	const offset = /^(.+)\.timeOffset$/.exec(id);
	if (offset)
		return {
			letter: 't',
			subscript: '0',
			of: `time zero, ${runNames[offset[1]] ?? offset[1]}`,
			kind: 'time offset'
		};
	const factor = /^(.+)\.responseFactor$/.exec(id);
	if (factor)
		return { letter: 'f', subscript: factor[1], of: `response of ${factor[1]}`, kind: 'response factor' };
	return { letter: id, subscript: '', of: '', kind: 'other' };
}

/** One plain string, for sentences and tables of text. */
export const plainName = (name: ParameterName): string =>
	`${name.letter}${name.subscript.replace(/[0-9−]/g, (c) => SUBSCRIPTS[c])}`;

const SUBSCRIPTS: Record<string, string> = {
	'0': '₀',
	'1': '₁',
	'2': '₂',
	'3': '₃',
	'4': '₄',
	'5': '₅',
	'6': '₆',
	'7': '₇',
	'8': '₈',
	'9': '₉',
	'−': '₋'
};

const escaped = (text: string): string => text.replace(/[.*+?^${}()|[\]\\]/g, '\\$&');

/** A message of the engine with its ids replaced by what people see: "k₂ (B → C)" for s2.forward.kRef, "Run 2" for r2. */
export function inPlainWords(
	message: string,
	scheme: SchemeContent,
	runNames: Record<string, string> = {}
): string {
	const steps = scheme.steps.map((s) => escaped(s.id)).join('|');
	const runs = Object.keys(runNames).map(escaped).join('|');
	let text = message;
	if (steps)
		text = text.replace(
			new RegExp(`\\b[A-Za-z][\\w-]*\\.(?:${steps})\\.(?:forward|reverse)\\.[kK]\\b`, 'g'),
			(id) => {
				const name = parameterName(id, scheme, runNames);
				return name.kind === 'other' ? id : `${plainName(name)} (${name.of})`;
			}
		);
	text = text.replace(/\b([A-Za-z][\w-]*)\.([A-Za-z][\w-]*)\.responseFactor\b/g, (id) => {
		const name = parameterName(id, scheme, runNames);
		return `${name.letter} of ${name.subscript} (${name.of})`;
	});
	if (steps)
		text = text.replace(new RegExp(`\\b(?:${steps})\\.(?:forward|reverse)\\.\\w+`, 'g'), (id) => {
			const name = parameterName(id, scheme, runNames);
			return name.kind === 'other' ? id : `${plainName(name)} (${name.of})`;
		});
	if (runs) {
		text = text.replace(new RegExp(`\\b(?:${runs})\\.(?:initial\\.\\w+|timeOffset)`, 'g'), (id) => {
			const name = parameterName(id, scheme, runNames);
			return name.kind === 'other' ? id : `${plainName(name)} (${name.of})`;
		});
		text = text.replace(new RegExp(`\\b(?:run )?(${runs})\\b`, 'g'), (_all, id: string) => runNames[id]);
	}
	return text.replace(/\b(\w+)\.responseFactor\b/g, (id) => {
		const name = parameterName(id, scheme, runNames);
		return `${name.letter} of ${name.subscript}`;
	});
}
