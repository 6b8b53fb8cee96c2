/**
 * What is wrong or doubtful in a network, before anything is computed.
 *
 * Each finding is a typed issue with the species or step it concerns. `stop`: nothing can be computed; `caution`: computed,
 * but the chemist should look; `note`: for information. What is checked: `check-steps.ts`, `check-mass.ts`, `check-charge.ts`,
 * `cycles.ts`. What depends on sound steps is looked at only when nothing stops.
 *
 * | symbol | name here |
 * | --- | --- |
 * | order of the levels | `RANK` |
 *
 * Source: Wegscheider's condition, R. Wegscheider, Monatsh. Chem. 22 (1901) 849; the rest are the definitions of `types.ts`.
 */
import { chargeIssues, excessMissing, smallExcess, unreached, type ChargeById } from './check-charge';
import { growthIssues, massIssues } from './check-mass';
import { duplicateSteps, speciesIssues, stepIssues } from './check-steps';
import { cycleIssues } from './cycles';
import type { Conditions, Network, NetworkIssue } from './types';

export type { ChargeById } from './check-charge';

/** Pseudo-first-order is doubtful below this many equivalents; common practice, hence overridable. */
const EXCESS_EQUIVALENTS = 10;

export interface CheckOptions {
	/** Equivalents below which an excess is reported; 10 when left out. */
	excessEquivalents?: number;
}

/**
 * Checks a network, and with a charge and conditions also what depends on them.
 * @returns issues, those of level `stop` first; empty when there is nothing to say
 */
export function checkNetwork(
	network: Network,
	charge?: ChargeById,
	conditions?: Conditions,
	options: CheckOptions = {}
): NetworkIssue[] {
	const issues = [...speciesIssues(network), ...network.steps.flatMap((step) => stepIssues(network, step))];
	issues.push(...duplicateSteps(network));
	if (charge) issues.push(...chargeIssues(network, charge));
	if (conditions) issues.push(...excessMissing(network, conditions));
	if (issues.some((issue) => issue.level === 'stop')) return sorted(issues);
	issues.push(...growthIssues(network));
	issues.push(...network.steps.flatMap((step) => massIssues(network, step)));
	issues.push(...cycleIssues(network, conditions));
	if (charge) {
		issues.push(...unreached(network, charge));
		if (conditions)
			issues.push(
				...smallExcess(network, charge, conditions, options.excessEquivalents ?? EXCESS_EQUIVALENTS)
			);
	}
	return sorted(issues);
}

const RANK = { stop: 0, caution: 1, note: 2 } as const;
const sorted = (issues: NetworkIssue[]) => issues.sort((a, b) => RANK[a.level] - RANK[b.level]);
