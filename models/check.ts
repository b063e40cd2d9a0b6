import { DataTypes, Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { count, flag, foreignKey, id, instant, json, real, sha256, text } from './columns';

/**
 * A check of a notebook's posterior, one row for each request that differs: asking again gives the stored result, or goes on
 * where it was stopped. Written under an epoch as fits are.
 */
export class Check extends Model<InferAttributes<Check>, InferCreationAttributes<Check>> {
  declare id: CreationOptional<string>;
  declare notebookId: string;
  declare groupId: string;
  /** Numbered within its notebook. */
  declare number: number;
  declare kind: string;
  /** The notebook's revision when it was first asked for. */
  declare revision: number;
  declare measurementVersionId: string;
  /** Everything that determines the result. */
  declare request: Record<string, unknown>;
  declare requestSha256: string;
  declare status: string;
  declare message: CreationOptional<string | null>;
  declare stopRequested: CreationOptional<boolean>;
  declare epoch: CreationOptional<number>;
  declare leaseUntil: CreationOptional<Date | null>;
  declare queuedAt: Date;
  /** Seconds that what is left was expected to take when it was queued. */
  declare expectedSeconds: number;
  /** Simulated data sets that are stored. */
  declare done: CreationOptional<number>;
  /** Milliseconds of work, interruptions left out. */
  declare millisecondsSpent: CreationOptional<number>;
  /** JSON as it is presented. */
  declare result: CreationOptional<string | null>;
  declare startedBy: string;
  declare stoppedBy: CreationOptional<string | null>;
  declare createdAt: Date;
  declare endedAt: CreationOptional<Date | null>;
}

/** Ranks of the data sets from `first` on. */
export class CheckBlock extends Model<InferAttributes<CheckBlock>, InferCreationAttributes<CheckBlock>> {
  declare id: CreationOptional<number>;
  declare checkId: string;
  declare first: number;
  declare found: unknown[];
}

export function initCheckModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  Check.init(
    {
      id: id(),
      notebookId: foreignKey(),
      groupId: foreignKey(),
      number: count(),
      kind: text(16),
      revision: count(),
      measurementVersionId: foreignKey(),
      request: json(),
      requestSha256: sha256(),
      status: text(16),
      message: text(1000, true),
      stopRequested: flag(),
      epoch: { ...count(), defaultValue: 0 },
      leaseUntil: instant(true),
      queuedAt: instant(),
      expectedSeconds: real(),
      done: { ...count(), defaultValue: 0 },
      millisecondsSpent: { type: DataTypes.BIGINT, allowNull: false, defaultValue: 0 },
      result: { type: DataTypes.TEXT('long'), allowNull: true },
      startedBy: foreignKey(),
      stoppedBy: foreignKey(true),
      createdAt: instant(),
      endedAt: instant(true),
    },
    { ...plain, modelName: 'check', tableName: 'checks' },
  );
  CheckBlock.init(
    {
      id: { type: DataTypes.BIGINT, primaryKey: true, autoIncrement: true },
      checkId: foreignKey(),
      first: count(),
      found: json(),
    },
    { ...plain, modelName: 'checkBlock', tableName: 'check_blocks' },
  );
}
