import {
	DataTypes,
	Model,
	type CreationOptional,
	type InferAttributes,
	type InferCreationAttributes,
	type Sequelize
} from 'sequelize';
import type { Role, Scope } from '../../policy';
import { identity, options } from './common';

export class User extends Model<InferAttributes<User>, InferCreationAttributes<User>> {
	declare id: CreationOptional<string>;
	declare email: string;
	declare name: string;
	declare passwordHash: CreationOptional<string | null>;
	declare siteAdmin: CreationOptional<boolean>;
	declare disabledAt: CreationOptional<Date | null>;
	declare sessionEpoch: CreationOptional<number>;
	declare timeZone: CreationOptional<string | null>;
	declare createdAt: CreationOptional<Date>;
}

function initUser(sequelize: Sequelize): void {
	User.init(
		{
			...identity(),
			email: { type: DataTypes.STRING, allowNull: false },
			name: { type: DataTypes.STRING, allowNull: false },
			passwordHash: { type: DataTypes.STRING, allowNull: true },
			siteAdmin: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false },
			disabledAt: { type: DataTypes.DATE, allowNull: true },
			sessionEpoch: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
			timeZone: { type: DataTypes.STRING, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'users')
	);
}

export class Group extends Model<InferAttributes<Group>, InferCreationAttributes<Group>> {
	declare id: CreationOptional<string>;
	declare name: string;
	declare gxp: CreationOptional<boolean>;
	/** Gap in the mass balance that is noted, ± % of the charge; null: as the site has it. */
	declare massBalancePercent: CreationOptional<number | null>;
	declare version: CreationOptional<number>;
	declare createdAt: CreationOptional<Date>;
}

function initGroup(sequelize: Sequelize): void {
	Group.init(
		{
			...identity(),
			name: { type: DataTypes.STRING, allowNull: false },
			gxp: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false },
			massBalancePercent: { type: DataTypes.DOUBLE, allowNull: true },
			version: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 1 },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'groups')
	);
}

export class Membership extends Model<InferAttributes<Membership>, InferCreationAttributes<Membership>> {
	declare id: CreationOptional<string>;
	declare userId: string;
	declare groupId: string;
	declare role: Role;
	declare createdAt: CreationOptional<Date>;
}

function initMembership(sequelize: Sequelize): void {
	Membership.init(
		{
			...identity(),
			userId: { type: DataTypes.UUID, allowNull: false },
			groupId: { type: DataTypes.UUID, allowNull: false },
			role: { type: DataTypes.STRING, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'memberships')
	);
}

export class Invitation extends Model<InferAttributes<Invitation>, InferCreationAttributes<Invitation>> {
	declare id: CreationOptional<string>;
	declare groupId: CreationOptional<string | null>;
	declare email: string;
	declare role: CreationOptional<Role | null>;
	declare siteAdmin: CreationOptional<boolean>;
	declare tokenHash: string;
	declare expiresAt: Date;
	declare usedAt: CreationOptional<Date | null>;
	declare revokedAt: CreationOptional<Date | null>;
	declare invitedById: CreationOptional<string | null>;
	declare createdAt: CreationOptional<Date>;
}

function initInvitation(sequelize: Sequelize): void {
	Invitation.init(
		{
			...identity(),
			groupId: { type: DataTypes.UUID, allowNull: true },
			email: { type: DataTypes.STRING, allowNull: false },
			role: { type: DataTypes.STRING, allowNull: true },
			siteAdmin: { type: DataTypes.BOOLEAN, allowNull: false, defaultValue: false },
			tokenHash: { type: DataTypes.STRING, allowNull: false },
			expiresAt: { type: DataTypes.DATE, allowNull: false },
			usedAt: { type: DataTypes.DATE, allowNull: true },
			revokedAt: { type: DataTypes.DATE, allowNull: true },
			invitedById: { type: DataTypes.UUID, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'invitations')
	);
}

export class PasswordReset extends Model<
	InferAttributes<PasswordReset>,
	InferCreationAttributes<PasswordReset>
> {
	declare id: CreationOptional<string>;
	declare userId: string;
	declare tokenHash: string;
	declare expiresAt: Date;
	declare usedAt: CreationOptional<Date | null>;
	declare createdAt: CreationOptional<Date>;
}

function initPasswordReset(sequelize: Sequelize): void {
	PasswordReset.init(
		{
			...identity(),
			userId: { type: DataTypes.UUID, allowNull: false },
			tokenHash: { type: DataTypes.STRING, allowNull: false },
			expiresAt: { type: DataTypes.DATE, allowNull: false },
			usedAt: { type: DataTypes.DATE, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'password_resets')
	);
}

/** A session that its person ended by signing out on that device; its cookie, wherever it still is, opens nothing. */
export class EndedSession extends Model<
	InferAttributes<EndedSession>,
	InferCreationAttributes<EndedSession>
> {
	declare id: CreationOptional<string>;
	declare userId: string;
	declare signedInAt: Date;
	declare createdAt: CreationOptional<Date>;
}

function initEndedSession(sequelize: Sequelize): void {
	EndedSession.init(
		{
			...identity(),
			userId: { type: DataTypes.UUID, allowNull: false },
			signedInAt: { type: DataTypes.DATE, allowNull: false },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'ended_sessions')
	);
}

export class SignInAttempt extends Model<
	InferAttributes<SignInAttempt>,
	InferCreationAttributes<SignInAttempt>
> {
	declare id: CreationOptional<string>;
	declare key: string;
	declare failures: CreationOptional<number>;
	declare lockedUntil: CreationOptional<Date | null>;
	declare lastFailedAt: CreationOptional<Date | null>;
	declare createdAt: CreationOptional<Date>;
}

function initSignInAttempt(sequelize: Sequelize): void {
	SignInAttempt.init(
		{
			...identity(),
			key: { type: DataTypes.STRING, allowNull: false },
			failures: { type: DataTypes.INTEGER, allowNull: false, defaultValue: 0 },
			lockedUntil: { type: DataTypes.DATE, allowNull: true },
			lastFailedAt: { type: DataTypes.DATE, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'sign_in_attempts')
	);
}

export class ApiToken extends Model<InferAttributes<ApiToken>, InferCreationAttributes<ApiToken>> {
	declare id: CreationOptional<string>;
	declare userId: string;
	declare name: string;
	declare scopes: Scope[];
	declare tokenHash: string;
	declare expiresAt: Date;
	declare revokedAt: CreationOptional<Date | null>;
	declare lastUsedAt: CreationOptional<Date | null>;
	declare createdAt: CreationOptional<Date>;
}

function initApiToken(sequelize: Sequelize): void {
	ApiToken.init(
		{
			...identity(),
			userId: { type: DataTypes.UUID, allowNull: false },
			name: { type: DataTypes.STRING, allowNull: false },
			scopes: { type: DataTypes.JSON, allowNull: false },
			tokenHash: { type: DataTypes.STRING, allowNull: false },
			expiresAt: { type: DataTypes.DATE, allowNull: false },
			revokedAt: { type: DataTypes.DATE, allowNull: true },
			lastUsedAt: { type: DataTypes.DATE, allowNull: true },
			createdAt: { type: DataTypes.DATE, allowNull: false, defaultValue: DataTypes.NOW }
		},
		options(sequelize, 'api_tokens')
	);
}

export function initPeople(sequelize: Sequelize): void {
	initUser(sequelize);
	initGroup(sequelize);
	initMembership(sequelize);
	initInvitation(sequelize);
	initPasswordReset(sequelize);
	initEndedSession(sequelize);
	initSignInAttempt(sequelize);
	initApiToken(sequelize);
}
