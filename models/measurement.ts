import { Model, type Sequelize } from 'sequelize';
import type { CreationOptional, InferAttributes, InferCreationAttributes } from 'sequelize';
import { bytes, count, flag, foreignKey, id, instant, json, real, sha256, text } from './columns';

/** A measurement of a group: a name over its versions. */
export class Measurement extends Model<InferAttributes<Measurement>, InferCreationAttributes<Measurement>> {
  declare id: CreationOptional<string>;
  declare groupId: string;
  declare name: string;
  declare description: string;
  declare blind: boolean;
  declare simulated: boolean;
  declare createdBy: string;
  declare createdAt: Date;
}

/** One uploaded file, as kept in the object store. */
export interface StoredFile {
  part: 'file' | 'covariance' | 'mocks' | 'window' | 'columns' | 'theoryCovariance';
  fileName: string;
  key: string;
  bytes: number;
  sha256: string;
}

/** Power spectrum P(k) = amplitude · (k/pivot)^(tilt − 1) with the units of the file; null for what wasn't used. */
export interface Spectrum {
  amplitude: number;
  tilt: number;
  pivot: number | null;
  pivotUnit: string | null;
  wavenumberUnit: string;
  bispectrumUnit: string;
  h: number | null;
}

/**
 * One version of a measurement. Numbers are little-endian float64: `points` holds kappa, kappaLo, kappaHi (NaN
 * where there are no edges), S one after the other, each `rows` long; `covariance` is rows × rows, row-major.
 */
export class MeasurementVersion extends Model<
  InferAttributes<MeasurementVersion>,
  InferCreationAttributes<MeasurementVersion>
> {
  declare id: CreationOptional<string>;
  declare measurementId: string;
  declare version: number;
  declare rows: number;
  declare kappaMin: number;
  declare kappaMax: number;
  declare hasBinEdges: boolean;
  declare covarianceSource: string;
  declare mockCount: number | null;
  declare sha256: string;
  declare files: StoredFile[];
  declare mapping: Record<string, unknown>;
  declare checks: Record<string, unknown>[];
  declare points: Buffer;
  declare covariance: Buffer;
  /** Window, columns and theory covariance (see lib/services/stored-theory.ts); null for none. */
  declare theory: Buffer | null;
  declare truth: Record<string, number> | null;
  /** What the file's bispectrum was turned into S by; null where it gives S. */
  declare spectrum: CreationOptional<Spectrum | null>;
  declare createdBy: string;
  declare createdAt: Date;
}

export function initMeasurementModels(sequelize: Sequelize): void {
  const plain = { sequelize, timestamps: false, underscored: true } as const;
  Measurement.init(
    {
      id: id(),
      groupId: foreignKey(),
      name: text(120),
      description: text(2000),
      blind: flag(),
      simulated: flag(),
      createdBy: foreignKey(),
      createdAt: instant(),
    },
    { ...plain, modelName: 'measurement', tableName: 'measurements' },
  );
  MeasurementVersion.init(
    {
      id: id(),
      measurementId: foreignKey(),
      version: count(),
      rows: { ...count(), field: 'row_count' },
      kappaMin: real(),
      kappaMax: real(),
      hasBinEdges: flag(),
      covarianceSource: text(16),
      mockCount: count(true),
      sha256: sha256(),
      files: json(),
      mapping: json(),
      checks: json(),
      points: bytes(),
      covariance: bytes(),
      theory: bytes(true),
      truth: json(true),
      spectrum: json(true),
      createdBy: foreignKey(),
      createdAt: instant(),
    },
    { ...plain, modelName: 'measurementVersion', tableName: 'measurement_versions' },
  );
}
