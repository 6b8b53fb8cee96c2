/** What page and worker say to each other. */
import type { TaskName, Tasks } from './tasks';

export interface Call<N extends TaskName = TaskName> {
	id: number;
	name: N;
	task: Tasks[N]['takes'];
}

export type Reply = { id: number; value: Tasks[TaskName]['gives'] } | { id: number; failed: string };
