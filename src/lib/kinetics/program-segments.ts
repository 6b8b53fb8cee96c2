/** Temperature programs as segments: each a hold or a linear ramp; a jump is where two of them do not meet. */

export interface ProgramSegment {
	durationS: number;
	fromK: number;
	/** Equal to `fromK` in a hold. */
	toK: number;
}

export const holdSegment = (temperatureK: number, durationS: number): ProgramSegment => ({
	durationS,
	fromK: temperatureK,
	toK: temperatureK
});

export const rampSegment = (fromK: number, toK: number, durationS: number): ProgramSegment => ({
	durationS,
	fromK,
	toK
});

export const programDuration = (program: readonly ProgramSegment[]): number =>
	program.reduce((sum, segment) => sum + segment.durationS, 0);

/** True where the program never jumps by more than 0.01 K between segments. */
export const jumpFree = (program: readonly ProgramSegment[]): boolean =>
	program.every((segment, i) => i === 0 || Math.abs(segment.fromK - program[i - 1].toK) <= 0.01);

/**
 * A measured log as ramps between its points. The first and last temperatures are held before and after, from 0 to `untilS`.
 * @throws RangeError when the log has no point, or its times do not increase.
 */
export function programFromLog(
	timesS: ArrayLike<number>,
	temperaturesK: ArrayLike<number>,
	untilS = timesS[timesS.length - 1]
): ProgramSegment[] {
	if (timesS.length === 0 || timesS.length !== temperaturesK.length)
		throw new RangeError(
			`A log needs as many temperatures as times, at least one; found ${timesS.length} times and ${temperaturesK.length} temperatures.`
		);
	const segments: ProgramSegment[] = [];
	if (timesS[0] > 0) segments.push(holdSegment(temperaturesK[0], Math.min(timesS[0], untilS)));
	for (let i = 1; i < timesS.length; i++) {
		const duration = timesS[i] - timesS[i - 1];
		if (!(duration > 0))
			throw new RangeError(
				`The times of the log must increase; ${timesS[i]} s comes after ${timesS[i - 1]} s.`
			);
		const begin = Math.max(timesS[i - 1], 0);
		const end = Math.min(timesS[i], untilS);
		if (end <= begin) continue;
		const at = (t: number) =>
			temperaturesK[i - 1] + ((temperaturesK[i] - temperaturesK[i - 1]) * (t - timesS[i - 1])) / duration;
		segments.push(rampSegment(at(begin), at(end), end - begin));
	}
	const last = timesS[timesS.length - 1];
	if (untilS > last)
		segments.push(holdSegment(temperaturesK[temperaturesK.length - 1], untilS - Math.max(last, 0)));
	return segments;
}

/** K at a time (the later segment's at a jump); the ends beyond. */
export function temperatureAt(program: readonly ProgramSegment[], timeS: number): number {
	let left = timeS;
	for (const { durationS, fromK, toK } of program) {
		if (left < durationS) return fromK + ((toK - fromK) * Math.max(left, 0)) / durationS;
		left -= durationS;
	}
	return program[program.length - 1].toK;
}
