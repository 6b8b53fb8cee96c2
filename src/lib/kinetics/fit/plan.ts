/**
 * What a fit would do, before it is started: every parameter with its state, starting value, bounds and unit, how many values
 * count, and what stands in the way.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { planIssues, structuralFindings } from './checks';
import { eliminationOf } from './elimination';
import { identifiabilityFindings } from './identifiability';
import { mayBeLocal } from './local-slots';
import { compileProblem } from './problem';
import { toReported, type Slot } from './slots';
import { searchBox } from './starts';

export interface PlannedParameter {
	id: string;
	kind: Slot['kind'];
	state: 'fitted' | 'fixed' | 'tied';
	/** Starting value (fitted) or value (fixed, tied), in `unit`; null where it is not known yet. */
	value: number | null;
	unit: string;
	/** Whether the starting value was given, or is found from the data. */
	given: boolean;
	/** Bounds of the search in `unit`; null where there is none. */
	lower: number | null;
	upper: number | null;
	tiedTo: { id: string; factor: number } | null;
	/** The run that it belongs to, for an amount or a time offset; null for a parameter shared by all runs. */
	run: string | null;
	/** The shared id that it stands in for, where it is local to a run. */
	localOf?: string;
	/** Whether naming it in `options.local` gives each run a value of its own (or, for a local one, did). */
	mayBeLocal?: boolean;
}

export interface FitPlan {
	/** Whether the fit can be started: no issue of level 'stop'. */
	ready: boolean;
	parameters: PlannedParameter[];
	fitted: number;
	pointsUsed: number;
	pointsCensored: number;
	degreesOfFreedom: number;
	/** Ids of parameters that enter linearly and will be eliminated from the search. */
	eliminated?: string[];
	issues: FitFinding[];
}

/** Plans a fit. Never throws for anything that the request's author can mend. */
export function plan(request: FitRequest): FitPlan {
	const { problem, slots, issues } = compileProblem(request);
	const listed = [...slots.values()].filter((s) => s.reported);
	if (!problem) {
		return {
			ready: false,
			parameters: listed.map((slot) => planned(slot, null)),
			fitted: listed.filter((s) => s.state === 'fitted').length,
			pointsUsed: 0,
			pointsCensored: 0,
			degreesOfFreedom: 0,
			issues
		};
	}
	const box = searchBox(problem);
	const blocking = [...issues, ...planIssues(problem)];
	const all = [...blocking, ...identifiabilityFindings(problem, box), ...structuralFindings(problem)];
	const natural = (slot: Slot, v: number) => toReported(slot, slot.scale === 'ln' ? Math.exp(v) : v);
	return {
		ready: !blocking.some((i) => i.level === 'stop'),
		parameters: listed.map((slot) => {
			const j = problem.free.indexOf(slot);
			if (j < 0) return planned(slot, null);
			return planned(slot, {
				value: slot.guessed ? toReported(slot, slot.value) : natural(slot, box.guess[j]),
				lower: natural(slot, box.lower[j]),
				upper: natural(slot, box.upper[j])
			});
		}),
		fitted: problem.free.length,
		pointsUsed: problem.counted,
		pointsCensored: problem.censored,
		degreesOfFreedom: problem.counted - problem.free.length,
		eliminated: eliminationOf(problem, box).linear.map((j) => problem.free[j].id),
		issues: all
	};
}

function planned(
	slot: Slot,
	search: { value: number; lower: number; upper: number } | null
): PlannedParameter {
	const own = Number.isFinite(slot.value) ? toReported(slot, slot.value) : null;
	const finite = (v: number | undefined) => (v !== undefined && Number.isFinite(v) ? v : null);
	return {
		id: slot.id,
		kind: slot.kind,
		state: slot.state,
		value: search ? finite(search.value) : slot.tie ? null : own,
		unit: slot.unit,
		given: slot.guessed,
		lower: finite(search?.lower),
		upper: finite(search?.upper),
		tiedTo: slot.tie ? { id: slot.tie.to, factor: slot.tie.factor } : null,
		run: slot.run,
		...(slot.localOf ? { localOf: slot.localOf } : {}),
		...(slot.localOf || (slot.run === null && mayBeLocal(slot)) ? { mayBeLocal: true } : {})
	};
}
