import { housekeeping } from './housekeeping';
import { jobService } from './jobs/service';
import { mailSender } from './mail/sender';

/** Something that runs beside the requests for as long as the service does. */
export interface BackgroundService {
	name: string;
	start(): Promise<void> | void;
	/** At the signal to stop, while open requests still finish: close event streams, take on nothing new. */
	announceStop?(): void;
	/** Finishes or hands back what is in work; the database is still open. */
	stop(): Promise<void> | void;
}

/** Started in this order once the database is open and migrated; stopped in the reverse order. */
export const BACKGROUND_SERVICES: BackgroundService[] = [mailSender, jobService, housekeeping];
