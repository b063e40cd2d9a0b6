import { DataTypes, Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { bytes, count, foreignKey, id, instant, json, real, sha256, text } from './columns';

/**
 * A scan of a notebook's measurement for frequencies, one row for each request that differs: asking again gives the stored
 * result. Written under an epoch as fits are.
 */
export class Scan extends Model<InferAttributes<Scan>, InferCreationAttributes<Scan>> {
  declare id: CreationOptional<string>;
  declare notebookId: string;
  declare groupId: string;
  /** Numbered within its notebook. */
  declare number: number;
  declare measurementVersionId: string;
  /** Everything that determines the result. */
  declare request: Record<string, unknown>;
  declare requestSha256: string;
  declare status: string;
  declare message: CreationOptional<string | null>;
  /** 0 to 1. */
  declare progress: CreationOptional<number>;
  declare epoch: CreationOptional<number>;
  declare leaseUntil: CreationOptional<Date | null>;
  /** JSON as it is presented. */
  declare result: CreationOptional<string | null>;
  /** Height of every null, little-endian float64, in the order of the measurement's nulls; null where there are none. */
  declare heights: CreationOptional<Buffer | null>;
  declare planeHeights: CreationOptional<Buffer | null>;
  declare startedBy: string;
  declare createdAt: Date;
  declare endedAt: CreationOptional<Date | null>;
}

export function initScanModel(sequelize: Sequelize): void {
  Scan.init(
    {
      id: id(),
      notebookId: foreignKey(),
      groupId: foreignKey(),
      number: count(),
      measurementVersionId: foreignKey(),
      request: json(),
      requestSha256: sha256(),
      status: text(16),
      message: text(1000, true),
      progress: { ...real(), defaultValue: 0 },
      epoch: { ...count(), defaultValue: 0 },
      leaseUntil: instant(true),
      result: { type: DataTypes.TEXT('long'), allowNull: true },
      heights: bytes(true),
      planeHeights: bytes(true),
      startedBy: foreignKey(),
      createdAt: instant(),
      endedAt: instant(true),
    },
    { sequelize, timestamps: false, underscored: true, modelName: 'scan', tableName: 'scans' },
  );
}
