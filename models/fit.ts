import { Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { DataTypes } from 'sequelize';
import { bytes, count, flag, foreignKey, id, instant, json, real, sha256, text } from './columns';

/**
 * The sampling of one frozen snapshot. MariaDB is the truth: a worker owns the fit while it holds the lease of the
 * present `epoch`; every commit says `AND epoch = ?`, so that one that was paused and comes back can't write.
 */
export class Fit extends Model<InferAttributes<Fit>, InferCreationAttributes<Fit>> {
  declare id: CreationOptional<string>;
  declare notebookId: string;
  declare groupId: string;
  /** Numbered within its notebook. */
  declare number: number;
  declare revision: number;
  declare measurementVersionId: string;
  declare snapshot: Record<string, unknown>;
  declare snapshotSha256: string;
  /** Kept draws a replica that are allowed; `extend` raises it. Not part of the snapshot: it doesn't change the draws. */
  declare maxDraws: number;
  declare targetRhat: number;
  declare targetEss: number;
  /** Kept draws a replica before which a met target doesn't end the fit: `extend` of a converged fit sets it. */
  declare targetFrom: CreationOptional<number>;
  declare status: string;
  declare message: CreationOptional<string | null>;
  /** Set by `stop`; looked at between blocks. */
  declare stopRequested: CreationOptional<boolean>;
  declare epoch: CreationOptional<number>;
  declare leaseUntil: CreationOptional<Date | null>;
  /** Recorded draws a replica that are committed, warm-up included. */
  declare draws: CreationOptional<number>;
  /** Milliseconds of sampling, interruptions left out. */
  declare millisecondsSpent: CreationOptional<number>;
  declare drawsPerSecond: CreationOptional<number | null>;
  /** Diagnostics, acceptance, history, gate as presented; always of the committed draws. */
  declare report: CreationOptional<Record<string, unknown> | null>;
  /** Lengths and checksums of the sample files of an ended fit, with what they were made of. */
  declare outputs: CreationOptional<Record<string, unknown> | null>;
  /** The fit of an older version of the measurement whose settings it repeats. */
  declare repeatsId: CreationOptional<string | null>;
  declare startedBy: string;
  /** Who asked for the stop; null where nobody did. */
  declare stoppedBy: CreationOptional<string | null>;
  declare createdAt: Date;
  /** Since when it waits, or waited, for its turn. */
  declare queuedAt: CreationOptional<Date | null>;
  /** Seconds of sampling up to its budget, as they were expected when it was queued: shorter fits come first. */
  declare expectedSeconds: CreationOptional<number>;
  declare startedAt: CreationOptional<Date | null>;
  declare endedAt: CreationOptional<Date | null>;
  /** When draws or a report were last committed, by the database's clock. */
  declare committedAt: CreationOptional<Date | null>;
}

/** Whole sampler state of one replica at its last committed block. */
export class FitReplica extends Model<InferAttributes<FitReplica>, InferCreationAttributes<FitReplica>> {
  declare id: CreationOptional<string>;
  declare fitId: string;
  declare replica: number;
  declare draws: number;
  declare state: Buffer;
}

/**
 * One block of recorded draws of one replica: little-endian float64, row-major, `width` values a draw
 * (ln likelihood, ln prior, sampled parameters). Row i is recorded draw `firstDraw + i × stride`, from the start of warm-up.
 */
export class FitBlock extends Model<InferAttributes<FitBlock>, InferCreationAttributes<FitBlock>> {
  declare id: CreationOptional<number>;
  declare fitId: string;
  declare replica: number;
  declare firstDraw: number;
  declare stride: number;
  declare rows: number;
  declare width: number;
  declare values: Buffer;
}

export function initFitModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  Fit.init(
    {
      id: id(),
      notebookId: foreignKey(),
      groupId: foreignKey(),
      number: count(),
      revision: count(),
      measurementVersionId: foreignKey(),
      snapshot: json(),
      snapshotSha256: sha256(),
      maxDraws: count(),
      targetRhat: real(),
      targetEss: real(),
      targetFrom: { ...count(), defaultValue: 0 },
      status: text(16),
      message: text(1000, true),
      stopRequested: flag(),
      epoch: { ...count(), defaultValue: 0 },
      leaseUntil: instant(true),
      draws: { ...count(), defaultValue: 0 },
      millisecondsSpent: { type: DataTypes.BIGINT, allowNull: false, defaultValue: 0 },
      drawsPerSecond: real(true),
      report: json(true),
      outputs: json(true),
      repeatsId: { ...foreignKey(), allowNull: true },
      startedBy: foreignKey(),
      stoppedBy: foreignKey(true),
      createdAt: instant(),
      queuedAt: instant(true),
      expectedSeconds: { ...real(), defaultValue: 0 },
      startedAt: instant(true),
      endedAt: instant(true),
      committedAt: instant(true),
    },
    { ...plain, modelName: 'fit', tableName: 'fits' },
  );
  FitReplica.init(
    { id: id(), fitId: foreignKey(), replica: count(), draws: count(), state: bytes() },
    { ...plain, modelName: 'fitReplica', tableName: 'fit_replicas' },
  );
  FitBlock.init(
    {
      id: { type: DataTypes.BIGINT, autoIncrement: true, primaryKey: true },
      fitId: foreignKey(),
      replica: count(),
      firstDraw: count(),
      stride: count(),
      rows: { ...count(), field: 'row_count' },
      width: count(),
      values: { ...bytes(), field: 'draw_values' },
    },
    { ...plain, modelName: 'fitBlock', tableName: 'fit_blocks' },
  );
}
