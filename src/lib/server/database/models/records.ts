import {
	DataTypes,
	Model,
	type CreationOptional,
	type InferAttributes,
	type InferCreationAttributes,
	type Sequelize
} from 'sequelize';
import { identity, options } from './common';

export class MailOutbox extends Model<InferAttributes<MailOutbox>, InferCreationAttributes<MailOutbox>> {
	declare id: CreationOptional<string>;
	declare to: string;
	declare subject: string;
	declare text: string;
	declare status: CreationOptional<string>;
	declare attempts: CreationOptional<number>;
	declare nextAttemptAt: Date;
	declare sentAt: CreationOptional<Date | null>;
	declare error: CreationOptional<string | null>;
	declare createdAt: CreationOptional<Date>;
}

function initMailOutbox(sequelize: Sequelize): void {
	MailOutbox.init(
		{
			...identity(),
			to: { type: DataTypes.STRING, allowNull: false },
			subject: { type: DataTypes.STRING, allowNull: false },
			text: { type: DataTypes.TEXT, allowNull: false },
			status: { type: DataTypes.STRING, allowNull: false, defaultValue: 'queued' },
			attempts: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
			nextAttemptAt: { type: DataTypes.DATE, allowNull: false },
			sentAt: { type: DataTypes.DATE, allowNull: true },
			error: { type: DataTypes.TEXT, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'mail_outbox')
	);
}

export class Setting extends Model<InferAttributes<Setting>, InferCreationAttributes<Setting>> {
	declare id: CreationOptional<string>;
	declare key: string;
	declare value: unknown;
	declare version: CreationOptional<number>;
	declare updatedById: CreationOptional<string | null>;
	declare updatedAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initSetting(sequelize: Sequelize): void {
	Setting.init(
		{
			...identity(),
			key: { type: DataTypes.STRING, allowNull: false },
			value: { type: DataTypes.JSON, allowNull: false },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			updatedById: { type: DataTypes.UUID, allowNull: true },
			updatedAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'settings')
	);
}

export class IdempotencyKey extends Model<
	InferAttributes<IdempotencyKey>,
	InferCreationAttributes<IdempotencyKey>
> {
	declare id: CreationOptional<string>;
	declare userId: string;
	declare key: string;
	declare requestHash: string;
	declare status: number;
	declare body: CreationOptional<object | null>;
	declare createdAt: CreationOptional<Date>;
}

function initIdempotencyKey(sequelize: Sequelize): void {
	IdempotencyKey.init(
		{
			...identity(),
			userId: { type: DataTypes.UUID, allowNull: false },
			key: { type: DataTypes.STRING, allowNull: false },
			requestHash: { type: DataTypes.STRING, allowNull: false },
			status: { type: DataTypes.INTEGER, allowNull: false },
			body: { type: DataTypes.JSON, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'idempotency_keys')
	);
}

export function initRecords(sequelize: Sequelize): void {
	initMailOutbox(sequelize);
	initSetting(sequelize);
	initIdempotencyKey(sequelize);
}
