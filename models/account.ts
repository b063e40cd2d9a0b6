import { DataTypes, Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { flag, foreignKey, id, instant, text } from './columns';

/** A person who can sign in. */
export class User extends Model<InferAttributes<User>, InferCreationAttributes<User>> {
  declare id: CreationOptional<string>;
  declare name: CreationOptional<string | null>;
  declare email: string;
  declare emailVerified: CreationOptional<Date | null>;
  declare image: CreationOptional<string | null>;
  declare siteAdmin: CreationOptional<boolean>;
  /** Whether a mail is sent when a fit of theirs has ended. */
  declare mailAboutFits: CreationOptional<boolean>;
  declare lastSignInAt: CreationOptional<Date | null>;
  /** Since when they may not sign in; null where they may. */
  declare disabledAt: CreationOptional<Date | null>;
}

/** An outside identity; unused by mailed links, required by the adapter. */
export class Account extends Model<InferAttributes<Account>, InferCreationAttributes<Account>> {
  declare id: CreationOptional<string>;
  declare type: string;
  declare provider: string;
  declare providerAccountId: string;
  declare userId: string | null;
}

export class Session extends Model<InferAttributes<Session>, InferCreationAttributes<Session>> {
  declare id: CreationOptional<string>;
  declare expires: Date;
  declare sessionToken: string;
  declare userId: string | null;
}

/** A mailed one-time link, kept as a hash. */
export class VerificationToken extends Model<
  InferAttributes<VerificationToken>,
  InferCreationAttributes<VerificationToken>
> {
  declare token: string;
  declare identifier: string;
  declare expires: Date;
}

/** A bearer token of the API: 256 random bits, kept as their SHA-256. */
export class ApiToken extends Model<InferAttributes<ApiToken>, InferCreationAttributes<ApiToken>> {
  declare id: CreationOptional<string>;
  declare userId: string;
  declare name: string;
  declare tokenHash: string;
  declare createdAt: Date;
  declare lastUsedAt: CreationOptional<Date | null>;
  declare revokedAt: CreationOptional<Date | null>;
}

/** The adapter finds its models by name and table; a minified class name must not matter. */
export function initAccountModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false } as const;
  User.init(
    {
      id: id(),
      name: text(255, true),
      email: { ...text(255), unique: 'email' },
      emailVerified: instant(true),
      image: text(255, true),
      siteAdmin: flag(),
      mailAboutFits: { ...flag(), defaultValue: true },
      lastSignInAt: instant(true),
      disabledAt: instant(true),
    },
    { ...plain, modelName: 'user', tableName: 'users', underscored: true },
  );
  Account.init(
    {
      id: id(),
      type: text(255),
      provider: text(255),
      providerAccountId: text(255),
      userId: foreignKey(true),
    },
    { ...plain, modelName: 'account', tableName: 'accounts', underscored: true },
  );
  Session.init(
    {
      id: id(),
      expires: instant(),
      sessionToken: { ...text(255), unique: 'sessionToken' },
      userId: foreignKey(true),
    },
    { ...plain, modelName: 'session', tableName: 'sessions', underscored: true },
  );
  VerificationToken.init(
    { token: { type: DataTypes.STRING(255), primaryKey: true }, identifier: text(255), expires: instant() },
    { ...plain, modelName: 'verificationToken', tableName: 'verification_tokens', underscored: true },
  );
  ApiToken.init(
    {
      id: id(),
      userId: foreignKey(),
      name: text(120),
      tokenHash: { type: DataTypes.CHAR(64), allowNull: false, unique: 'tokenHash' },
      createdAt: instant(),
      lastUsedAt: instant(true),
      revokedAt: instant(true),
    },
    { ...plain, modelName: 'apiToken', tableName: 'api_tokens', underscored: true },
  );
}
