/** When samples can be taken: count, span, gap and working hours, as typed. */
import { workingWindows } from './working-hours';

export interface ReadLimits {
	samples: number;
	earliest: number;
	latest: number;
	minimumGap: number;
	windows: [number, number][];
}

export class SampleLimits {
	samples = $state<number | null>(4);
	earliest = $state<number | null>(0);
	/** Undefined until somebody typed it: the default then goes with the conditions. */
	typedLatest = $state<number | null | undefined>();
	gap = $state<number | null>(0);
	limited = $state(false);
	start = $state('09:00');
	from = $state('08:00');
	to = $state('17:00');

	constructor(private readonly usualLatest: () => number) {}

	get latest(): number | null {
		return this.typedLatest === undefined ? this.usualLatest() : this.typedLatest;
	}

	/** What was typed, in the time unit of the run; or what is missing, in words. */
	read(timeUnit: string): ReadLimits | string {
		const { samples, earliest, latest, gap, limited, start, from, to } = this;
		if (samples === null || earliest === null || latest === null)
			return 'Give the number of samples, the earliest and the latest time.';
		const windows = limited ? workingWindows({ start, from, to }, earliest, latest, timeUnit) : [];
		if (limited && windows.length === 0)
			return 'These working hours leave no time between the earliest and the latest sample. Write clock times as 08:30.';
		return { samples, earliest, latest, minimumGap: gap ?? 0, windows };
	}

	/** Clock time at time zero, where working hours count. */
	get clock(): string | null {
		return this.limited ? this.start : null;
	}
}
