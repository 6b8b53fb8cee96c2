import type { RecipeContent, SetPoint } from '$lib/schemas/recipe';
import type { Caution, CautionFacts, SiteRule, Topic } from './caution-types';
import { heatCautions } from './cautions-heat';
import { plain } from './rounding';
import { stableKey } from './stable-key';

export * from './caution-types';

/** Words by which the title of a site rule shows that it concerns a topic. */
const WORDS: Record<Topic, RegExp> = {
	heat: /heat|thermal|exotherm|calorimet|runaway/i,
	gas: /gas|vent|relief|pressure/i,
	autocatalysis: /autocatal|thermal|heat|decompos/i,
	'hazard-statements': /hazard|chemical|substance|data sheet|sds/i,
	'scale-up': /scale|plant|pilot|transfer/i,
	kinetics: /scale|kinetic|process safety/i,
	extrapolation: /scale|kinetic|process safety/i,
	ipc: /sampl|control|analy/i
};

/** The site's rule on this topic by its title; else the first rule of the site; else none. */
export function ruleFor(rules: readonly SiteRule[], topic: Topic): SiteRule | null {
	return rules.find((r) => WORDS[topic].test(r.title)) ?? rules[0] ?? null;
}

export type CautionDraft = Omit<Caution, 'key' | 'rule'> & {
	topic: Topic;
	inputs: unknown;
};

const outside = (point: SetPoint): string[] => {
	if (!point.studied) return [];
	const [low, high] = point.studied;
	const used = [point.value, ...(point.par ?? []), ...(point.nor ?? [])].filter((v) => v !== null);
	return [
		...(low !== null && Math.min(...used) < low
			? [`reaches down to ${plain(Math.min(...used))} ${point.unit}`]
			: []),
		...(high !== null && Math.max(...used) > high
			? [`reaches up to ${plain(Math.max(...used))} ${point.unit}`]
			: [])
	];
};

function extrapolation(content: RecipeContent): CautionDraft[] {
	return content.setPoints.flatMap((point) => {
		const ends = outside(point);
		if (ends.length === 0) return [];
		const [low, high] = point.studied!;
		return [
			{
				topic: 'extrapolation' as const,
				code: 'outside-studied-range',
				kind: 'caution' as const,
				title: `${point.parameter} leaves the studied range.`,
				found: `It ${ends.join(' and ')}; the runs behind the fit cover ${low === null ? 'no lower end' : plain(low)} to ${high === null ? 'no upper end' : plain(high)} ${point.unit}.`,
				why: 'Outside the studied range the curves rest on the form of the rate law alone, and the mechanism may change.',
				unknown: 'Whether the scheme holds there. No run was made there.',
				inputs: {
					point: point.id,
					value: point.value,
					par: point.par,
					nor: point.nor,
					studied: point.studied
				}
			}
		];
	});
}

function beyondLastSample({ hold, basis }: RecipeContent): CautionDraft[] {
	if (!hold || hold.stated === null || basis.lastTimeH === null) return [];
	const hours = { min: hold.stated / 60, h: hold.stated, d: hold.stated * 24 }[hold.unit];
	if (hours <= basis.lastTimeH) return [];
	return [
		{
			topic: 'extrapolation',
			code: 'hold-beyond-last-sample',
			kind: 'caution',
			title: 'The hold is longer than any run was followed.',
			found: `The stated hold is ${plain(hold.stated)} ${hold.unit}; the last sample behind the fit was taken at ${plain(basis.lastTimeH)} h.`,
			why: 'A slow side reaction that no sample could show would only begin to matter later.',
			unknown: 'What forms after the last sample.',
			inputs: { hold: hold.stated, unit: hold.unit, last: basis.lastTimeH }
		}
	];
}

function programNotCounted(content: RecipeContent): CautionDraft[] {
	const ramps = content.procedure.filter((o) => o.kind === 'Heat' || o.kind === 'Cool' || o.kind === 'Dose');
	if (!content.hold || ramps.length === 0) return [];
	const minutes = ramps.reduce((sum, o) => sum + (o.durationMin ?? 0), 0);
	return [
		{
			topic: 'scale-up',
			code: 'ramps-not-counted',
			kind: 'caution',
			title: 'Heating, cooling and dosing are not counted in the hold time.',
			found: `The hold time is for constant temperature; the procedure has ${ramps.length} ${ramps.length === 1 ? 'operation' : 'operations'} before or after it in which the reaction also runs${minutes > 0 ? ` (${plain(minutes)} min in all)` : ''}.`,
			why: 'At scale a slow heat-up consumes starting material before the hold begins, and impurities keep forming while the batch cools.',
			unknown: 'The temperature that the batch really follows in the vessel used.',
			inputs: { hold: content.hold.stated, ramps: ramps.map((o) => [o.kind, o.durationMin, o.fromC, o.toC]) }
		}
	];
}

/** A result that comes back late: the stop decision lies later than the sample by the lag. */
function ipcLag(content: RecipeContent): CautionDraft[] {
	const { hold } = content;
	if (!hold || hold.stated === null || hold.notBefore === null) return [];
	const factor = { min: 1, h: 60, d: 1440 }[hold.unit];
	const widthMin = (hold.stated - hold.notBefore) * factor;
	return content.ipc.flatMap((ipc) => {
		if (ipc.lagMin === null || ipc.lagMin <= widthMin) return [];
		return [
			{
				topic: 'ipc' as const,
				code: 'ipc-lag-exceeds-window',
				kind: 'caution' as const,
				title: 'The result comes later than the window is wide.',
				found: `From sample to result ${plain(ipc.lagMin)} min pass; the window is ${plain(widthMin)} min wide (${plain(hold.notBefore!)} to ${plain(hold.stated!)} ${hold.unit}).`,
				why: 'The batch keeps reacting while the laboratory works, so a decision on the result may come after the window has closed.',
				unknown: 'How long the laboratory takes on the day.',
				inputs: { lag: ipc.lagMin, notBefore: hold.notBefore, stated: hold.stated, unit: hold.unit }
			}
		];
	});
}

function findings(facts: CautionFacts): CautionDraft[] {
	const said = facts.fit.findings.filter((f) => f.level !== 'note');
	const drafts = said.map((f): CautionDraft => ({
		topic: f.code.includes('autocat') ? 'autocatalysis' : 'kinetics',
		code: `fit-${f.code}`,
		kind: 'caution',
		title: f.level === 'stop' ? 'The fit has a finding that stops.' : 'The fit has a finding.',
		found: `${f.message} (fit ${facts.fit.number})`,
		why: 'Every figure of this recipe that comes from the fit carries the doubt.',
		unknown: 'Whether another scheme would change the set-points.',
		inputs: { fit: facts.fit.number, code: f.code, message: f.message }
	}));
	if (facts.fit.status === 'converged') return drafts;
	return [
		{
			topic: 'kinetics',
			code: 'fit-not-converged',
			kind: 'caution',
			title: 'The fit did not converge.',
			found: `Fit ${facts.fit.number} ended as “${facts.fit.status}”.`,
			why: 'Its constants and intervals may be far from the best ones.',
			unknown: 'The constants that describe the data best.',
			inputs: { fit: facts.fit.number, status: facts.fit.status }
		},
		...drafts
	];
}

function hazardsMissing(content: RecipeContent): CautionDraft[] {
	const covered = content.hazards.map((h) => h.product.toLowerCase());
	const missing = content.charges.filter(
		(c) => !covered.some((p) => p.includes(c.material.toLowerCase()) || c.material.toLowerCase().includes(p))
	);
	if (missing.length === 0) return [];
	const names = missing.map((c) => c.material).join(', ');
	return [
		{
			topic: 'hazard-statements',
			code: 'hazards-not-characterised',
			kind: 'not assessed',
			title: 'Hazards not characterised.',
			found: `No supplier's safety data sheet is entered for ${names}.`,
			why: 'The statements of the supplier tell what a person who handles the material has to know.',
			unknown: `Every hazard of ${names}, and of intermediates that have no safety data sheet.`,
			inputs: { materials: missing.map((c) => c.material) }
		}
	];
}

/** Every caution of a recipe version, in the order in which a reader needs them. Pure: equal facts give equal keys. */
export function cautions(facts: CautionFacts): Caution[] {
	const drafts = [
		...heatCautions(facts),
		...findings(facts),
		...extrapolation(facts.content),
		...beyondLastSample(facts.content),
		...ipcLag(facts.content),
		...programNotCounted(facts.content),
		...hazardsMissing(facts.content)
	];
	const all = drafts.map(({ topic, inputs, ...rest }): Caution => ({
		...rest,
		key: stableKey(rest.code, inputs),
		rule: ruleFor(facts.rules, topic)
	}));
	return [...all.filter((c) => c.kind === 'caution'), ...all.filter((c) => c.kind === 'not assessed')];
}
