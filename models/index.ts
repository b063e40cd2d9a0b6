import { Sequelize } from 'sequelize';
import { Account, ApiToken, Session, User, initAccountModels } from './account';
import { AuditEvent, Group, Invitation, Membership, initGroupModels } from './group';
import { Measurement, MeasurementVersion, initMeasurementModels } from './measurement';
import { Notebook, NotebookRevision, initNotebookModels } from './notebook';
import { Fit, FitBlock, FitReplica, initFitModels } from './fit';
import { FitMail, initFitQueueModels } from './fit-queue';
import { FitPart, NotebookPart, initPartModels } from './parts';
import { Scan, initScanModel } from './scan';
import { Check, CheckBlock, initCheckModels } from './check';

export { Account, ApiToken, Session, User, VerificationToken } from './account';
export { AuditEvent, Group, Invitation, Membership } from './group';
export { Measurement, MeasurementVersion, type StoredFile } from './measurement';
export { Notebook, NotebookRevision, type NotebookOrigin, type NotebookSettings } from './notebook';
export { Fit, FitBlock, FitReplica } from './fit';
export { FitLimit, FitMail } from './fit-queue';
export { FitPart, NotebookPart } from './parts';
export { Scan } from './scan';
export { Check, CheckBlock } from './check';

/** All associations in one place. */
function associate(): void {
  User.hasMany(Session, { foreignKey: 'userId' });
  Session.belongsTo(User, { foreignKey: 'userId' });
  User.hasMany(Account, { foreignKey: 'userId' });
  Account.belongsTo(User, { foreignKey: 'userId' });
  User.hasMany(ApiToken, { foreignKey: 'userId' });
  ApiToken.belongsTo(User, { foreignKey: 'userId' });
  Group.hasMany(Membership, { foreignKey: 'groupId' });
  Membership.belongsTo(Group, { foreignKey: 'groupId' });
  User.hasMany(Membership, { foreignKey: 'userId' });
  Membership.belongsTo(User, { foreignKey: 'userId' });
  Group.hasMany(Invitation, { foreignKey: 'groupId' });
  Invitation.belongsTo(Group, { foreignKey: 'groupId' });
  Group.hasMany(AuditEvent, { foreignKey: 'groupId' });
  Group.hasMany(Measurement, { foreignKey: 'groupId' });
  Measurement.belongsTo(Group, { foreignKey: 'groupId' });
  Measurement.hasMany(MeasurementVersion, { foreignKey: 'measurementId', as: 'versions' });
  MeasurementVersion.belongsTo(Measurement, { foreignKey: 'measurementId' });
  Group.hasMany(Notebook, { foreignKey: 'groupId' });
  Notebook.belongsTo(Group, { foreignKey: 'groupId' });
  Notebook.belongsTo(MeasurementVersion, { foreignKey: 'measurementVersionId' });
  Notebook.hasMany(NotebookRevision, { foreignKey: 'notebookId', as: 'revisions' });
  NotebookRevision.belongsTo(Notebook, { foreignKey: 'notebookId' });
  Notebook.hasMany(Fit, { foreignKey: 'notebookId' });
  Fit.belongsTo(Notebook, { foreignKey: 'notebookId' });
  Fit.belongsTo(MeasurementVersion, { foreignKey: 'measurementVersionId' });
  Fit.hasMany(FitReplica, { foreignKey: 'fitId', as: 'replicas' });
  Fit.hasMany(FitBlock, { foreignKey: 'fitId', as: 'blocks' });
  Fit.hasMany(FitMail, { foreignKey: 'fitId', as: 'mails' });
  FitMail.belongsTo(Fit, { foreignKey: 'fitId' });
  FitMail.belongsTo(User, { foreignKey: 'userId' });
  Notebook.hasMany(NotebookPart, { foreignKey: 'notebookId', as: 'parts' });
  NotebookPart.belongsTo(Notebook, { foreignKey: 'notebookId' });
  NotebookPart.belongsTo(MeasurementVersion, { foreignKey: 'measurementVersionId' });
  Fit.hasMany(FitPart, { foreignKey: 'fitId', as: 'parts' });
  FitPart.belongsTo(Fit, { foreignKey: 'fitId' });
  FitPart.belongsTo(MeasurementVersion, { foreignKey: 'measurementVersionId' });
  Notebook.hasMany(Scan, { foreignKey: 'notebookId' });
  Scan.belongsTo(Notebook, { foreignKey: 'notebookId' });
  Scan.belongsTo(MeasurementVersion, { foreignKey: 'measurementVersionId' });
  Notebook.hasMany(Check, { foreignKey: 'notebookId' });
  Check.belongsTo(Notebook, { foreignKey: 'notebookId' });
  Check.belongsTo(MeasurementVersion, { foreignKey: 'measurementVersionId' });
  Check.hasMany(CheckBlock, { foreignKey: 'checkId', as: 'blocks' });
}

interface QueryingConnection {
  query: (...args: unknown[]) => Promise<unknown>;
}

/**
 * Opens the database and binds every model to it. No table is created: migrations do that.
 * The connector's result arrays carry a `meta` that Sequelize 6 can't delete; a copied array lets it.
 */
export function openDatabase(url: string, options: { poolMax?: number } = {}): Sequelize {
  const sequelize = new Sequelize(url, {
    dialect: 'mariadb',
    timezone: '+00:00',
    logging: false,
    pool: { max: options.poolMax ?? 10, min: 0, idle: 10_000, acquire: 20_000 },
    dialectOptions: { connectTimeout: 5_000 },
    hooks: {
      afterConnect: (connection: unknown) => {
        const raw = connection as QueryingConnection;
        const query = raw.query.bind(raw);
        raw.query = async (...args) => {
          const result = await query(...args);
          if (!Array.isArray(result)) return result;
          const copy = [...result] as unknown[] & { meta?: unknown };
          copy.meta = (result as unknown[] & { meta?: unknown }).meta;
          return copy;
        };
      },
    },
  });
  initAccountModels(sequelize);
  initGroupModels(sequelize);
  initMeasurementModels(sequelize);
  initNotebookModels(sequelize);
  initFitModels(sequelize);
  initFitQueueModels(sequelize);
  initPartModels(sequelize);
  initScanModel(sequelize);
  initCheckModels(sequelize);
  associate();
  return sequelize;
}
