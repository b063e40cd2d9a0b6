import { z } from 'zod';

export const settingsSchema = z.object({
  /** Whether a mail is sent when a fit that one started has ended. */
  mailAboutFits: z.boolean(),
});
export type Settings = z.infer<typeof settingsSchema>;

export const changeSettingsSchema = z.strictObject({ mailAboutFits: z.boolean().optional() });
export type ChangeSettings = z.infer<typeof changeSettingsSchema>;
