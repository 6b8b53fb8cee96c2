/**
 * Parameters local to a run: a shared slot named in `options.local` is replaced by one slot for each run that it acts in.
 *
 *     <step>.<sense>.kRef               →  <run>.<step>.<sense>.k    at the run's own temperature
 *     <step>.reverse.equilibriumConstant →  <run>.<step>.reverse.K    at the run's own temperature
 *     <channel>.responseFactor          →  <run>.<channel>.responseFactor
 *
 * A local constant needs no energy while its run keeps one temperature; with a measured log the step's energy still says how the
 * constant changes along it: ln k(T) = ln k_run − (E/R)(1/T − 1/T_run). Where no run uses an energy any more it is taken out of the
 * parameters. Starting values follow from the shared guess and the energy's guess.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { isFitted } from '../../schemas/quantity';
import { isEquilibrium } from '../../schemas/scheme';
import { GAS_CONSTANT, inverseTemperatureGap } from '../rate-laws';
import { toSi, UnitError } from '../units';
import { stop } from './finding';
import { runId, type Slot } from './slots';

type Run = FitRequest['runs'][number];

const LOCAL_KINDS = new Set<Slot['kind']>(['rate', 'equilibrium', 'response']);

/** Whether a parameter may have a value of its own in each run. */
export const mayBeLocal = (slot: Slot): boolean => LOCAL_KINDS.has(slot.kind) && slot.state !== 'fixed';

/** The id that a shared parameter has in one run. */
export const localId = (run: string, shared: string): string =>
	`${run}.${shared.replace(/\.kRef$/, '.k').replace(/\.equilibriumConstant$/, '.K')}`;

/** Whether a report has a rate or equilibrium constant that holds in one run only: it has no k(T) to predict from. */
export const hasLocalConstants = (report: { parameters: { id: string }[] }): boolean =>
	report.parameters.some((p) => isLocalConstant(p.id));

/** Whether an id is that of a constant local to a run, such as `r2.s1.forward.k`. */
export const isLocalConstant = (id: string): boolean => /^[^.]+\.[^.]+\.(forward|reverse)\.[kK]$/.test(id);

export const hasLog = (run: Run): boolean => (run.temperatureLog?.length ?? 0) >= 2;

/** Puts local slots in the place of the shared ones; problems become issues. */
export function localise(request: FitRequest, slots: Map<string, Slot>, issues: FitFinding[]): void {
	const asked = new Set(request.options.local ?? []);
	if (asked.size === 0) return;
	const all = [...slots.entries()];
	slots.clear();
	for (const [id, slot] of all) {
		if (!asked.delete(id) || !usable(slot, request, issues)) slots.set(id, slot);
		else for (const local of copies(slot, request, new Map(all))) slots.set(local.id, local);
	}
	for (const id of asked)
		issues.push(
			stop(
				'parameter-unknown',
				`"${id}" in options.local is not a parameter that all runs of this fit share.`,
				[id]
			)
		);
	dropEnergies(request, slots);
}

function usable(slot: Slot, { options }: FitRequest, issues: FitFinding[]): boolean {
	const refuse = (code: string, message: string): boolean => {
		issues.push(stop(code, message, [slot.id]));
		return false;
	};
	if (slot.run !== null)
		return refuse('local-not-possible', `${slot.id} already belongs to one run. Take it out of "local".`);
	if (!LOCAL_KINDS.has(slot.kind))
		return refuse(
			'local-not-possible',
			`${slot.id} cannot be local to a run: a run at one temperature says nothing of an energy. Make the rate constant local instead.`
		);
	if (slot.state === 'fixed' || options.fixed.includes(slot.id))
		return refuse(
			'local-and-fixed',
			`${slot.id} is to be held fixed and to have a value of its own in each run. Choose one of the two.`
		);
	if (Object.hasOwn(options.bounds, slot.id))
		return refuse(
			'local-bounds',
			`The bounds of ${slot.id} hold for a shared value. Give bounds for each run (${localId('r1', slot.id)}, …), or take it out of "local".`
		);
	return true;
}

function copies(slot: Slot, request: FitRequest, all: Map<string, Slot>): Slot[] {
	return request.runs.flatMap((run, index): Slot[] => {
		if (!actsIn(slot, run, request)) return [];
		const id = runId(run, index);
		const value = slot.kind === 'response' ? slot.value : atRun(slot, run, request, all);
		return [{ ...slot, id: localId(id, slot.id), value, run: id, localOf: slot.id }];
	});
}

/** Whether a run has the channel, or whether its charge reaches the step. */
function actsIn(slot: Slot, run: Run, request: FitRequest): boolean {
	if (slot.kind === 'response')
		return run.channels.some((c) => `${c.id}.responseFactor` === slot.id && c.responseFactor);
	const step = request.steps.find((s) => s.id === slot.step);
	if (!step) return false;
	const reached = reachedFrom(run, request);
	if (slot.kind === 'equilibrium' || !slot.id.includes('.reverse.'))
		return reached.has(step.reactant) || (step.reverse !== null && reached.has(step.products[0]?.species));
	return reached.has(step.products[0]?.species);
}

function reachedFrom(run: Run, request: FitRequest): Set<string> {
	const reached = new Set(
		Object.entries(run.initial).flatMap(([id, amount]) =>
			isFitted(amount) || amount.value !== 0 ? [id] : []
		)
	);
	for (let before = -1; before !== reached.size;) {
		before = reached.size;
		for (const { reactant, products, reverse } of request.steps) {
			if (reached.has(reactant)) for (const p of products) reached.add(p.species);
			if (reverse && reached.has(products[0]?.species)) reached.add(reactant);
		}
	}
	return reached;
}

/** The shared guess carried to the run's temperature by the guess of its energy, where there is one. */
function atRun(slot: Slot, run: Run, request: FitRequest, all: Map<string, Slot>): number {
	const energy = energyOf(slot, all);
	if (!energy || !Number.isFinite(energy.value)) return slot.value;
	try {
		const gap = inverseTemperatureGap(
			toSi(run.temperature, 'temperature'),
			toSi(request.referenceTemperature, 'temperature')
		);
		return slot.value * Math.exp((-energy.value * gap) / GAS_CONSTANT);
	} catch (error) {
		// The run or the scheme is reported for its unit elsewhere.
		if (error instanceof UnitError) return slot.value;
		throw error;
	}
}

/** The energy that carries a constant from one temperature to another. */
export const energyOf = (slot: Pick<Slot, 'id'>, slots: Map<string, Slot>): Slot | undefined =>
	slots.get(slot.id.replace(/\.kRef$/, '.activationEnergy').replace(/\.equilibriumConstant$/, '.enthalpy'));

/** Energies that no run uses any more: held, and out of the report. */
function dropEnergies({ runs, steps, options }: FitRequest, slots: Map<string, Slot>): void {
	if (runs.some(hasLog)) return;
	for (const shared of options.local ?? []) {
		if (slots.has(shared)) continue;
		const energy = energyOf({ id: shared }, slots);
		if (!energy) continue;
		// Through an equilibrium constant the reverse direction still follows the temperature of its own enthalpy alone.
		const step = steps.find((s) => s.id === energy.step);
		if (!step || (energy.kind === 'enthalpy' && !isEquilibrium(step.reverse))) continue;
		energy.state = 'fixed';
		energy.reported = false;
		if (!Number.isFinite(energy.value)) energy.value = 0;
	}
}
