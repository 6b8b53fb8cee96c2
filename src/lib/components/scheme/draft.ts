/** Changes of a scheme while it is drawn: each takes a content and gives a new one, nothing is changed in place. */
import type { Quantity } from '$lib/schemas/quantity';
import {
	isEquilibrium,
	type RateLawContent,
	type SchemeContent,
	type SpeciesContent,
	type StepContent
} from '$lib/schemas/scheme';
import { freeSeries } from '../charts/series';

export type Side = 'reactant' | 'product';
export type Direction = 'forward' | 'reverse';

const FIRST_CONSTANT = 0.5;

function withStep(
	content: SchemeContent,
	stepId: string,
	edit: (step: StepContent) => StepContent
): SchemeContent {
	return { ...content, steps: content.steps.map((s) => (s.id === stepId ? edit(s) : s)) };
}

/** First free id of the form s1, s2 … */
export function freeStepId(content: SchemeContent): string {
	const taken = new Set(content.steps.map((s) => s.id));
	let n = 1;
	while (taken.has(`s${n}`)) n++;
	return `s${n}`;
}

/** First free letter for a new species: A to Z, then S27 … */
export function freeSymbol(content: SchemeContent): string {
	const taken = new Set(content.species.map((s) => s.id));
	for (let i = 0; i < 26; i++) {
		const letter = String.fromCharCode(65 + i);
		if (!taken.has(letter)) return letter;
	}
	let n = 27;
	while (taken.has(`S${n}`)) n++;
	return `S${n}`;
}

/** Time unit in which most constants of the scheme are written. */
export function usualTimeUnit(content: SchemeContent): string {
	const counts = new Map<string, number>();
	for (const step of content.steps) {
		const unit = /(s|min|h|d)\)?$/.exec(step.forward.kRef.unit)?.[1];
		if (unit) counts.set(unit, (counts.get(unit) ?? 0) + 1);
	}
	return [...counts].sort((a, b) => b[1] - a[1])[0]?.[0] ?? 'h';
}

export function addSpecies(content: SchemeContent, species: SpeciesContent): SchemeContent {
	const series = species.series ?? freeSeries(content.species.map((s, i) => s.series ?? i));
	return { ...content, species: [...content.species, { ...species, series }] };
}

/** Changes what is known of a species; a new symbol is carried through every step. */
export function editSpecies(content: SchemeContent, id: string, next: SpeciesContent): SchemeContent {
	const carried = next.id === id ? content : renameSpecies(content, id, next.id);
	return { ...carried, species: carried.species.map((s) => (s.id === next.id ? { ...next } : s)) };
}

function renameSpecies(content: SchemeContent, from: string, to: string): SchemeContent {
	const name = (id: string) => (id === from ? to : id);
	const law = <L extends RateLawContent>(l: L): L =>
		l.excess ? { ...l, excess: l.excess.map((e) => ({ ...e, species: name(e.species) })) } : l;
	return {
		...content,
		species: content.species.map((s) => ({ ...s, id: name(s.id) })),
		steps: content.steps.map((step) => ({
			...step,
			reactant: name(step.reactant),
			products: step.products.map((p) => ({ ...p, species: name(p.species) })),
			forward: law(step.forward),
			reverse: step.reverse && !isEquilibrium(step.reverse) ? law(step.reverse) : step.reverse
		}))
	};
}

/** Steps that name a species, as reactant, product or excess reagent. */
export const stepsNaming = (content: SchemeContent, id: string): StepContent[] =>
	content.steps.filter(
		(s) =>
			s.reactant === id ||
			s.products.some((p) => p.species === id) ||
			[s.forward, s.reverse].some((l) => l && !isEquilibrium(l) && l.excess?.some((e) => e.species === id))
	);

/** Takes a species off the tray and out of every step; a step left with nothing goes too. */
export function removeSpecies(content: SchemeContent, id: string): SchemeContent {
	const law = <L extends RateLawContent>(l: L): L =>
		l.excess ? { ...l, excess: l.excess.filter((e) => e.species !== id) } : l;
	const steps = content.steps
		.map((step) => ({
			...step,
			reactant: step.reactant === id ? ('' as const) : step.reactant,
			products: step.products.filter((p) => p.species !== id),
			forward: law(step.forward),
			reverse: step.reverse && !isEquilibrium(step.reverse) ? law(step.reverse) : step.reverse
		}))
		.filter((step) => step.reactant !== '' || step.products.length > 0);
	return { ...content, species: content.species.filter((s) => s.id !== id), steps };
}

export function addStep(content: SchemeContent, start: Partial<StepContent> = {}): SchemeContent {
	const step: StepContent = {
		id: freeStepId(content),
		reactant: '',
		products: [],
		forward: { kRef: { value: FIRST_CONSTANT, unit: `1/${usualTimeUnit(content)}` } },
		reverse: null,
		...start
	};
	return { ...content, steps: [...content.steps, step] };
}

export const removeStep = (content: SchemeContent, stepId: string): SchemeContent => ({
	...content,
	steps: content.steps.filter((s) => s.id !== stepId)
});

/** Puts a species into a step; `stepId` null makes a new step. A product that is there already counts once more. */
export function place(
	content: SchemeContent,
	stepId: string | null,
	side: Side,
	species: string
): SchemeContent {
	if (stepId === null)
		return addStep(
			content,
			side === 'reactant' ? { reactant: species } : { products: [{ species, coefficient: 1 }] }
		);
	return withStep(content, stepId, (step) => {
		if (side === 'reactant') return { ...step, reactant: species };
		const there = step.products.some((p) => p.species === species);
		const { loss: _loss, ...rest } = step;
		return {
			...rest,
			products: there
				? step.products.map((p) => (p.species === species ? { ...p, coefficient: p.coefficient + 1 } : p))
				: [...step.products, { species, coefficient: 1 }]
		};
	});
}

/** Takes a species out of one side of a step; a step left with nothing goes too. */
export function takeOut(content: SchemeContent, stepId: string, side: Side, species: string): SchemeContent {
	const next = withStep(content, stepId, (step) =>
		side === 'reactant'
			? { ...step, reactant: '' }
			: { ...step, products: step.products.filter((p) => p.species !== species) }
	);
	const step = next.steps.find((s) => s.id === stepId);
	return step && step.reactant === '' && step.products.length === 0 ? removeStep(next, stepId) : next;
}

export interface Place {
	stepId: string | null;
	side: Side;
}

/** A chip dragged from one place to another; from the tray when `from` is null. */
export function move(content: SchemeContent, species: string, from: Place | null, to: Place): SchemeContent {
	if (from && from.stepId === to.stepId && from.side === to.side) return content;
	const placed = place(content, to.stepId, to.side, species);
	return from?.stepId ? takeOut(placed, from.stepId, from.side, species) : placed;
}

export const setCoefficient = (
	content: SchemeContent,
	stepId: string,
	species: string,
	coefficient: number
): SchemeContent =>
	withStep(content, stepId, (step) => ({
		...step,
		products: step.products.map((p) => (p.species === species ? { ...p, coefficient } : p))
	}));

/** → or ⇌; a new reverse constant starts at a quarter of the forward one. */
export const setReversible = (content: SchemeContent, stepId: string, reversible: boolean): SchemeContent =>
	withStep(content, stepId, (step) => {
		if (!reversible) return { ...step, reverse: null };
		if (step.reverse) return step;
		const { value, unit } = step.forward.kRef;
		return { ...step, reverse: { kRef: { value: Number((value / 4).toPrecision(3)), unit } } };
	});

/** Reverse direction by its own constant, or by the equilibrium constant; the numbers are carried over. */
export const setReverseForm = (
	content: SchemeContent,
	stepId: string,
	form: 'constant' | 'equilibrium'
): SchemeContent =>
	withStep(content, stepId, (step) => {
		const { value: forward, unit } = step.forward.kRef;
		if (!step.reverse) return step;
		if (form === 'equilibrium' && !isEquilibrium(step.reverse)) {
			const ratio = step.reverse.kRef.unit === unit ? forward / step.reverse.kRef.value : 4;
			const value = Number.isFinite(ratio) ? Number(ratio.toPrecision(4)) : 4;
			return { ...step, reverse: { equilibriumConstant: { value, unit: '1' } } };
		}
		if (form === 'constant' && isEquilibrium(step.reverse)) {
			const value = Number((forward / step.reverse.equilibriumConstant.value).toPrecision(4));
			return { ...step, reverse: { kRef: { value, unit } } };
		}
		return step;
	});

/** "To nothing we assay": a step without products that is meant so. */
export const setLoss = (content: SchemeContent, stepId: string, loss: boolean): SchemeContent =>
	withStep(content, stepId, (step) => {
		const { loss: _loss, ...rest } = step;
		return loss ? { ...rest, products: [], reverse: null, loss: true } : rest;
	});

function editLaw(step: StepContent, direction: Direction, edit: (law: RateLawContent) => RateLawContent) {
	if (direction === 'forward') return { ...step, forward: edit(step.forward) };
	if (!step.reverse || isEquilibrium(step.reverse)) return step;
	return { ...step, reverse: edit(step.reverse) };
}

export const setConstant = (
	content: SchemeContent,
	stepId: string,
	direction: Direction,
	kRef: Quantity
): SchemeContent =>
	withStep(content, stepId, (step) => editLaw(step, direction, (law) => ({ ...law, kRef })));

export const setEnergy = (
	content: SchemeContent,
	stepId: string,
	direction: Direction,
	energy: Quantity | null
): SchemeContent =>
	withStep(content, stepId, (step) =>
		editLaw(step, direction, (law) => {
			const { activationEnergy: _before, ...rest } = law;
			return energy ? { ...rest, activationEnergy: energy } : rest;
		})
	);

export const setEquilibrium = (
	content: SchemeContent,
	stepId: string,
	equilibriumConstant: Quantity,
	enthalpy: Quantity | null | undefined = undefined
): SchemeContent =>
	withStep(content, stepId, (step) => {
		if (!step.reverse || !isEquilibrium(step.reverse)) return step;
		const { enthalpy: before, ...rest } = step.reverse;
		const kept = enthalpy === undefined ? before : (enthalpy ?? undefined);
		return { ...step, reverse: { ...rest, equilibriumConstant, ...(kept ? { enthalpy: kept } : {}) } };
	});

/** Order of a species in excess in one direction; null takes it out. The unit follows the total order. */
export const setExcess = (
	content: SchemeContent,
	stepId: string,
	direction: Direction,
	species: string,
	order: number | null,
	unitOf: (timeUnit: string, order: number) => string
): SchemeContent =>
	withStep(content, stepId, (step) =>
		editLaw(step, direction, (law) => {
			const others = (law.excess ?? []).filter((e) => e.species !== species);
			const list = order === null ? others : [...others, { species, order }];
			const total = list.reduce((sum, e) => sum + e.order, 0);
			const time = /(s|min|h|d)\)?$/.exec(law.kRef.unit)?.[1] ?? 'h';
			const { excess: _before, ...rest } = law;
			const kRef = { value: law.kRef.value, unit: unitOf(time, total) };
			return list.length ? { ...rest, kRef, excess: list } : { ...rest, kRef };
		})
	);

/** What differs between two contents, in words, for the conflict dialog. */
export function differences(mine: SchemeContent, theirs: SchemeContent) {
	const rows: { label: string; mine: string; theirs: string }[] = [];
	const compare = (label: string, a: string, b: string) => {
		if (a !== b) rows.push({ label, mine: a, theirs: b });
	};
	const by = <T extends { id: string }>(list: T[]) => new Map(list.map((x) => [x.id, x]));
	const words = (s: SpeciesContent | undefined) =>
		s
			? [s.id, s.name, s.role, s.molarMassGPerMol && `${s.molarMassGPerMol} g/mol`].filter(Boolean).join(', ')
			: '';
	const [mySpecies, theirSpecies] = [by(mine.species), by(theirs.species)];
	for (const id of new Set([...mySpecies.keys(), ...theirSpecies.keys()]))
		compare(`species ${id}`, words(mySpecies.get(id)), words(theirSpecies.get(id)));
	const [mySteps, theirSteps] = [by(mine.steps), by(theirs.steps)];
	const stepLabel = (id: string) => {
		const own = mine.steps.findIndex((s) => s.id === id) + 1;
		return own ? `step ${own}` : `their step ${theirs.steps.findIndex((s) => s.id === id) + 1}`;
	};
	for (const id of new Set([...mySteps.keys(), ...theirSteps.keys()]))
		compare(stepLabel(id), stepWords(mySteps.get(id)), stepWords(theirSteps.get(id)));
	const temperature = (c: SchemeContent) => `${c.referenceTemperature.value} ${c.referenceTemperature.unit}`;
	compare('reference temperature', temperature(mine), temperature(theirs));
	return rows;
}

const fitted = (q: unknown): string => {
	if (!q || typeof q !== 'object') return '';
	if ('value' in q && 'unit' in q) return `${String(q.value)} ${String(q.unit)}`;
	return 'fitted';
};

function lawWords(law: StepContent['reverse']): string {
	if (!law) return '';
	if (isEquilibrium(law))
		return `K ${fitted(law.equilibriumConstant)}${law.enthalpy ? `, ΔH ${fitted(law.enthalpy)}` : ''}`;
	const excess = (law.excess ?? []).map((e) => `[${e.species}]^${e.order}`).join(' ');
	return [fitted(law.kRef), law.activationEnergy && `Ea ${fitted(law.activationEnergy)}`, excess]
		.filter(Boolean)
		.join(', ');
}

/** A → B + 2 C in words, with its constants. */
export function stepWords(step: StepContent | undefined): string {
	if (!step) return '';
	const products = step.products.map((p) => `${p.coefficient === 1 ? '' : `${p.coefficient} `}${p.species}`);
	const right = products.length ? products.join(' + ') : step.loss ? 'nothing we assay' : '?';
	const constants = [lawWords(step.forward), lawWords(step.reverse)].filter(Boolean).join('; back ');
	return `${step.reactant || '?'} ${step.reverse ? '⇌' : '→'} ${right} (${constants})`;
}
