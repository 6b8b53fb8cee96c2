/** What the study's head says about saving; a station that saves by itself keeps it up to date. */
export type SaveStatus = 'idle' | 'waiting' | 'saving' | 'saved' | 'failed' | 'conflict';

export const saveState = $state<{ status: SaveStatus; at: number | null; message: string }>({
	status: 'idle',
	at: null,
	message: ''
});

export function setSaveState(status: SaveStatus, message = ''): void {
	saveState.status = status;
	saveState.message = message;
	if (status === 'saved') saveState.at = Date.now();
	if (status === 'idle') saveState.at = null;
}
