import { Op, QueryTypes, type Transaction } from 'sequelize';
import { Fit, FitMail, Group, Membership, Notebook, User } from '@/models';
import { database } from '@/lib/db';
import { log } from '@/lib/log';
import { sendFitEnded } from '@/lib/mail';
import { fitStatusSchema, type FitStatus } from '@/lib/schemas';

/** Seconds for which a mail is held by who sends it, and between two attempts at first and at most. */
const pace = { held: 60, first: 30, most: 3_600 } as const;

/** A mail that couldn't go out for so many days is of no more use. */
const daysTried = 3;

/**
 * Notes that a mail about the end of a fit is due, within the transaction that ends it: to who started it, unless they
 * stopped it themselves or want none. It is sent afterwards, by whichever worker finds it.
 */
export async function noteEnd(
  fit: Pick<Fit, 'id' | 'epoch' | 'startedBy' | 'stoppedBy'>,
  endedAs: FitStatus,
  transaction: Transaction,
): Promise<void> {
  if (endedAs === 'stopped' && (fit.stoppedBy === null || fit.stoppedBy === fit.startedBy)) return;
  const user = await User.findByPk(fit.startedBy, { attributes: ['mailAboutFits'], transaction });
  if (!user?.mailAboutFits) return;
  await FitMail.create(
    { fitId: fit.id, epoch: fit.epoch, userId: fit.startedBy, endedAs, createdAt: new Date() },
    { transaction },
  );
}

/** Takes one mail that is due and that nobody else is about to send. */
async function takeDue(now: Date): Promise<FitMail | null> {
  return database().transaction(async (transaction) => {
    const [due] = await database().query<{ id: string }>(
      `SELECT id FROM fit_mails WHERE sent_at IS NULL AND (held_until IS NULL OR held_until < :now)
         AND created_at > TIMESTAMPADD(DAY, -${daysTried}, :now)
       ORDER BY created_at LIMIT 1 FOR UPDATE SKIP LOCKED`,
      { replacements: { now }, type: QueryTypes.SELECT, transaction },
    );
    if (!due) return null;
    const mail = await FitMail.findByPk(due.id, { transaction, rejectOnEmpty: true });
    const heldUntil = new Date(now.getTime() + pace.held * 1000);
    return mail.update({ heldUntil, attempts: mail.attempts + 1 }, { transaction });
  });
}

/** What the mail is made of; null where its reader may not see the fit any more. */
async function contentsOf(mail: FitMail) {
  const fit = await Fit.findByPk(mail.fitId, { attributes: ['notebookId', 'groupId', 'number'] });
  const [user, group, notebook] = await Promise.all([
    User.findByPk(mail.userId, { attributes: ['email'] }),
    fit && Group.findByPk(fit.groupId, { attributes: ['name'] }),
    fit && Notebook.findByPk(fit.notebookId, { attributes: ['number'] }),
  ]);
  const member = fit && (await Membership.findOne({ where: { groupId: fit.groupId, userId: mail.userId } }));
  if (!fit || !user || !group || !notebook || !member) return null;
  return { fit, user, group, notebook };
}

/**
 * Sends the mails that are due and says how many went out. One that was held by a process that died is sent again under
 * the same message id, which is what keeps it single at its reader's even if the first had gone out already.
 */
export async function sendDueMails(now: () => Date = () => new Date()): Promise<number> {
  for (let sent = 0; ;) {
    const mail = await takeDue(now());
    if (!mail) return sent;
    const contents = await contentsOf(mail);
    if (!contents) {
      await mail.destroy();
      continue;
    }
    const { fit, user, group, notebook } = contents;
    try {
      await sendFitEnded(user.email, {
        mailId: mail.id,
        groupName: group.name,
        notebookId: fit.notebookId,
        notebookNumber: notebook.number,
        fitNumber: fit.number,
        endedAs: fitStatusSchema.parse(mail.endedAs),
      });
    } catch (error) {
      log.warn({ fitId: mail.fitId, err: error }, 'a mail about a fit is tried again later');
      const pause = Math.min(pace.most, pace.first * 2 ** (mail.attempts - 1));
      await mail.update({ heldUntil: new Date(now().getTime() + pause * 1000) });
      continue;
    }
    await FitMail.update({ sentAt: now() }, { where: { id: mail.id, sentAt: { [Op.is]: null } } });
    sent += 1;
  }
}
