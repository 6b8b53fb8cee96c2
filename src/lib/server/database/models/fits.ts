import {
	DataTypes,
	Model,
	type CreationOptional,
	type InferAttributes,
	type InferCreationAttributes,
	type Sequelize
} from 'sequelize';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import type { JobStatus } from '$lib/schemas/job';
import { identity, options } from './common';

export class Job extends Model<InferAttributes<Job>, InferCreationAttributes<Job>> {
	declare id: CreationOptional<string>;
	declare kind: string;
	declare groupId: string;
	declare studyId: CreationOptional<string | null>;
	declare status: JobStatus;
	/** What it computes: kept in `job_inputs`, put here by `withInput`. */
	declare input: unknown;
	declare inputHash: string;
	declare progress: CreationOptional<object | null>;
	declare error: CreationOptional<string | null>;
	declare attempts: CreationOptional<number>;
	declare heartbeatAt: CreationOptional<Date | null>;
	declare startedAt: CreationOptional<Date | null>;
	declare finishedAt: CreationOptional<Date | null>;
	declare cancelRequestedAt: CreationOptional<Date | null>;
	declare createdById: string;
	declare createdAt: CreationOptional<Date>;
}

function initJob(sequelize: Sequelize): void {
	Job.init(
		{
			...identity(),
			kind: { type: DataTypes.STRING, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			studyId: { type: DataTypes.UUID, allowNull: true },
			status: { type: DataTypes.STRING, allowNull: false },
			input: { type: DataTypes.VIRTUAL },
			inputHash: { type: DataTypes.STRING, allowNull: false },
			progress: { type: DataTypes.JSON, allowNull: true },
			error: { type: DataTypes.TEXT, allowNull: true },
			attempts: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
			heartbeatAt: { type: DataTypes.DATE, allowNull: true },
			startedAt: { type: DataTypes.DATE, allowNull: true },
			finishedAt: { type: DataTypes.DATE, allowNull: true },
			cancelRequestedAt: { type: DataTypes.DATE, allowNull: true },
			createdById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'jobs')
	);
}

export class JobInput extends Model<InferAttributes<JobInput>, InferCreationAttributes<JobInput>> {
	declare jobId: string;
	declare input: unknown;
}

function initJobInput(sequelize: Sequelize): void {
	JobInput.init(
		{
			jobId: { type: DataTypes.UUID, primaryKey: true },
			input: { type: DataTypes.JSON, allowNull: false }
		},
		options(sequelize, 'job_inputs')
	);
}

export class JobEvent extends Model<InferAttributes<JobEvent>, InferCreationAttributes<JobEvent>> {
	declare id: CreationOptional<string>;
	declare jobId: string;
	declare seq: number;
	declare type: string;
	declare data: unknown;
	declare createdAt: CreationOptional<Date>;
}

function initJobEvent(sequelize: Sequelize): void {
	JobEvent.init(
		{
			...identity(),
			jobId: { type: DataTypes.UUID, allowNull: false },
			seq: { type: DataTypes.INTEGER, allowNull: false },
			type: { type: DataTypes.STRING, allowNull: false },
			data: { type: DataTypes.JSON, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'job_events')
	);
}

export class Fit extends Model<InferAttributes<Fit>, InferCreationAttributes<Fit>> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare groupId: string;
	declare number: number;
	declare schemeVersionId: string;
	declare request: FitRequest;
	declare inputHash: string;
	declare engineVersion: string;
	declare seed: number;
	declare report: FitReport;
	declare startedAt: Date;
	declare finishedAt: Date;
	declare createdById: string;
	declare createdAt: CreationOptional<Date>;
}

function initFit(sequelize: Sequelize): void {
	Fit.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			schemeVersionId: { type: DataTypes.UUID, allowNull: false },
			request: { type: DataTypes.JSON, allowNull: false },
			inputHash: { type: DataTypes.STRING, allowNull: false },
			engineVersion: { type: DataTypes.STRING, allowNull: false },
			seed: { type: DataTypes.INTEGER, allowNull: false },
			report: { type: DataTypes.JSON, allowNull: false },
			startedAt: { type: DataTypes.DATE, allowNull: false },
			finishedAt: { type: DataTypes.DATE, allowNull: false },
			createdById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'fits')
	);
}

export class FitRun extends Model<InferAttributes<FitRun>, InferCreationAttributes<FitRun>> {
	declare id: CreationOptional<string>;
	declare fitId: string;
	declare runId: string;
	declare runRevisionId: string;
	declare position: number;
	declare createdAt: CreationOptional<Date>;
}

function initFitRun(sequelize: Sequelize): void {
	FitRun.init(
		{
			...identity(),
			fitId: { type: DataTypes.UUID, allowNull: false },
			runId: { type: DataTypes.UUID, allowNull: false },
			runRevisionId: { type: DataTypes.UUID, allowNull: false },
			position: { type: DataTypes.INTEGER, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'fit_runs')
	);
}

export class WindowResult extends Model<
	InferAttributes<WindowResult>,
	InferCreationAttributes<WindowResult>
> {
	declare id: CreationOptional<string>;
	declare studyId: string;
	declare groupId: string;
	declare fitId: string;
	declare number: number;
	declare kind: string;
	declare input: unknown;
	declare result: unknown;
	declare engineVersion: string;
	declare seed: number;
	declare createdById: string;
	declare createdAt: CreationOptional<Date>;
}

function initWindowResult(sequelize: Sequelize): void {
	WindowResult.init(
		{
			...identity(),
			studyId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			fitId: { type: DataTypes.UUID, allowNull: false },
			number: { type: DataTypes.INTEGER, allowNull: false },
			kind: { type: DataTypes.STRING, allowNull: false },
			input: { type: DataTypes.JSON, allowNull: false },
			result: { type: DataTypes.JSON, allowNull: false },
			engineVersion: { type: DataTypes.STRING, allowNull: false },
			seed: { type: DataTypes.INTEGER, allowNull: false },
			createdById: { type: DataTypes.UUID, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'windows')
	);
}

export function initFits(sequelize: Sequelize): void {
	initJob(sequelize);
	initJobInput(sequelize);
	initJobEvent(sequelize);
	initFit(sequelize);
	initFitRun(sequelize);
	initWindowResult(sequelize);
}
