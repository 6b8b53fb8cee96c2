/**
 * Which temperature counts in a fit: the one stated for the run, or the measured log as a program. Unless a person chose,
 * the stated one counts while every reading lies within ±1 °C of it; beyond that a constant temperature would put what the
 * excursion did into the rate constants.
 */
import { toSi } from '$lib/kinetics/units';
import type { RunContent } from './run';

/** Readings this near to the stated temperature are scatter of the probe or of the bath. */
export const STEADY_K = 1;

type LoggedRun = Pick<RunContent, 'temperature' | 'temperatureLog' | 'useTemperatureLog'>;

export interface LogSpan {
	lowC: number;
	highC: number;
	/** Largest distance of a reading from the stated temperature. */
	farthestK: number;
	statedC: number;
	readings: number;
}

/** Null where there are not two readings to make a program of. */
export function logSpan(run: LoggedRun): LogSpan | null {
	const log = run.temperatureLog ?? [];
	if (log.length < 2) return null;
	const statedC = Number((toSi(run.temperature, 'temperature') - 273.15).toFixed(6));
	let [lowC, highC] = [Infinity, -Infinity];
	for (const { celsius } of log) {
		lowC = Math.min(lowC, celsius);
		highC = Math.max(highC, celsius);
	}
	const farthestK = Number(Math.max(Math.abs(lowC - statedC), Math.abs(highC - statedC)).toFixed(6));
	return { lowC, highC, farthestK, statedC, readings: log.length };
}

/** What counts when nobody has chosen. */
export const logLeaves = (span: LogSpan): boolean => span.farthestK > STEADY_K;

/** Whether fits use the measured log as the program of this run. */
export function usesLog(run: LoggedRun): boolean {
	const span = logSpan(run);
	return span !== null && (run.useTemperatureLog ?? logLeaves(span));
}

/** The run as a fit takes it: without a log that is on the record only. */
export function asFitted<R extends LoggedRun>(run: R): R {
	if (!run.temperatureLog || usesLog(run)) return run;
	const { temperatureLog: _onRecordOnly, ...rest } = run;
	return rest as R;
}

/** The choice written out, so that the record does not depend on what a later version takes for granted. */
export function withLogChoice<R extends LoggedRun>(run: R, chosen: boolean | undefined): R {
	const span = logSpan(run);
	if (!span) return run;
	return { ...run, useTemperatureLog: chosen ?? run.useTemperatureLog ?? logLeaves(span) };
}

/** "The log goes from 49.9 to 57.3 °C, up to 7.3 °C from the stated 50 °C: …" and what follows from it. */
export function whyWords(span: LogSpan): string {
	const far = Number(span.farthestK.toFixed(1));
	const range = `The log of ${span.readings} readings goes from ${span.lowC} to ${span.highC} °C`;
	return logLeaves(span)
		? `${range}, up to ${far} °C from the stated ${span.statedC} °C: it leaves ±${STEADY_K} °C, so the log is proposed as the program of the run.`
		: `${range}, within ±${STEADY_K} °C of the stated ${span.statedC} °C, so the stated temperature is proposed.`;
}
