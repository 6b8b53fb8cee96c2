/** What a fit has that the one before it had not, in words, so that a row of attempts can be read as a line of thought. */
import type { FitRequest } from '$lib/schemas/fit';
import { isFitted } from '$lib/schemas/quantity';
import { parameterName, plainName } from '$lib/kinetics/parameter-names';

export interface ComparableFit {
	scheme: { id: string; name: string; number: number };
	runs: { id: string; number: number; name: string; revision: number }[];
	request: FitRequest;
	engineVersion: string | null;
}

const list = (words: string[]): string =>
	words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} and ${words.at(-1)}`;

function schemeChange(before: ComparableFit, after: ComparableFit): string[] {
	if (before.scheme.id !== after.scheme.id)
		return [`scheme ${after.scheme.name} in place of ${before.scheme.name}`];
	if (before.scheme.number === after.scheme.number) return [];
	return [`scheme version ${after.scheme.number} in place of ${before.scheme.number}`];
}

function runChanges(before: ComparableFit, after: ComparableFit): string[] {
	const added = after.runs.filter((r) => !before.runs.some((b) => b.id === r.id)).map((r) => r.name);
	const gone = before.runs.filter((b) => !after.runs.some((r) => r.id === b.id)).map((r) => r.name);
	const revised = after.runs
		.filter((r) => before.runs.some((b) => b.id === r.id && b.revision !== r.revision))
		.map((r) => `${r.name} in revision ${r.revision}`);
	return [
		...(added.length ? [`${list(added)} added`] : []),
		...(gone.length ? [`${list(gone)} left out`] : []),
		...revised
	];
}

/** Ids of everything opened for fitting besides the constants of the steps. */
function openedIds(request: FitRequest): string[] {
	const ids: string[] = [];
	for (const step of request.steps)
		for (const direction of ['forward', 'reverse'] as const) {
			const law = step[direction];
			if (!law) continue;
			if ('activationEnergy' in law && isFitted(law.activationEnergy))
				ids.push(`${step.id}.${direction}.activationEnergy`);
			if ('enthalpy' in law && isFitted(law.enthalpy)) ids.push(`${step.id}.reverse.enthalpy`);
		}
	for (const run of request.runs) {
		for (const [species, amount] of Object.entries(run.initial))
			if (isFitted(amount)) ids.push(`${run.id}.initial.${species}`);
		if (isFitted(run.timeOffset)) ids.push(`${run.id}.timeOffset`);
		for (const channel of run.channels)
			if (isFitted(channel.responseFactor)) ids.push(`${channel.id}.responseFactor`);
	}
	return [...new Set(ids)];
}

function parameterChanges(before: ComparableFit, after: ComparableFit): string[] {
	const names = Object.fromEntries(after.runs.map((r) => [`r${r.number}`, r.name]));
	const named = (ids: string[]) =>
		list(
			ids.map((id) => {
				const name = parameterName(id, after.request, names);
				return name.kind === 'charge' || name.kind === 'time offset'
					? `${plainName(name)} (${name.of})`
					: plainName(name);
			})
		);
	const [was, is] = [before.request.options, after.request.options];
	const without = (ids: string[], others: string[]) => ids.filter((id) => !others.includes(id));
	const [tiedWas, tiedIs] = [was.tied, is.tied].map((t) => t.map((one) => one.parameter));
	const [openWas, openIs] = [openedIds(before.request), openedIds(after.request)];
	const phrases: [string[], string][] = [
		[without(is.fixed, was.fixed), 'held fixed'],
		[without(was.fixed, is.fixed), 'no longer held fixed'],
		[without(tiedIs, tiedWas), 'tied'],
		[without(tiedWas, tiedIs), 'no longer tied'],
		[without(is.local ?? [], was.local ?? []), 'of its own in each run'],
		[without(was.local ?? [], is.local ?? []), 'one for all runs again'],
		[without(openIs, openWas), 'opened for fitting'],
		[without(openWas, openIs), 'no longer fitted']
	];
	const changes = phrases.filter(([ids]) => ids.length > 0).map(([ids, words]) => `${named(ids)} ${words}`);
	if (JSON.stringify(was.bounds) !== JSON.stringify(is.bounds)) changes.push('other bounds');
	return changes;
}

function optionChanges(before: ComparableFit, after: ComparableFit): string[] {
	const [was, is] = [before.request.options, after.request.options];
	const changes: string[] = [];
	if (was.weighting.model !== is.weighting.model)
		changes.push(`${is.weighting.model} error model in place of ${was.weighting.model}`);
	else if (JSON.stringify(was.weighting) !== JSON.stringify(is.weighting))
		changes.push('other parts of the error model');
	const [ruleWas, ruleIs] = [was, is].map((o) => o.criterion ?? 'least squares');
	if (ruleWas !== ruleIs)
		changes.push(
			ruleIs === 'determinant' ? 'determinant criterion in place of least squares' : 'least squares again'
		);
	if (was.useTimeZeroRow !== is.useTimeZeroRow)
		changes.push(
			is.useTimeZeroRow === undefined
				? 'row at time zero as the charge says'
				: `row at time zero ${is.useTimeZeroRow ? 'used' : 'left out'}`
		);
	if (was.confidenceLevel !== is.confidenceLevel)
		changes.push(`confidence level ${Number((100 * is.confidenceLevel).toFixed(2))} %`);
	if (was.starts !== is.starts) changes.push(`${is.starts} starts in place of ${was.starts}`);
	if (was.seed !== is.seed) changes.push(`seed ${is.seed} in place of ${was.seed}`);
	if (before.engineVersion && after.engineVersion && before.engineVersion !== after.engineVersion)
		changes.push(`engine ${after.engineVersion} in place of ${before.engineVersion}`);
	return changes;
}

/** Phrases for a list; one that says so where nothing but starting values differs. */
export function changesSince(before: ComparableFit | null, after: ComparableFit): string[] {
	if (!before) return [];
	const changes = [
		...schemeChange(before, after),
		...runChanges(before, after),
		...parameterChanges(before, after),
		...optionChanges(before, after)
	];
	return changes.length ? changes : ['other starting values'];
}
