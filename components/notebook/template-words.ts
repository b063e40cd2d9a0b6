import { inWords, capital } from '@/components/words/counts';

/** "two mixed fields", "one field with free phase", "a smooth background" */
export function templateInWords(id: string, fields: number): string {
  const count = `${inWords(fields)} ${fields === 1 ? 'field' : 'fields'}`;
  if (id === 'background' || fields === 0) return 'a smooth background alone';
  if (id === 'free-phase') return `${count} with free amplitudes`;
  if (id === 'locked-squeezed')
    return fields === 1 ? 'one exchanged field' : `${inWords(fields)} mixed fields`;
  if (id === 'locked-exact')
    return fields === 1 ? 'one exchanged field, exactly' : `${inWords(fields)} mixed fields, exactly`;
  if (id === 'light') return fields === 1 ? 'one light field' : `${inWords(fields)} mixed light fields`;
  return count;
}

/** The same at the beginning of a sentence. */
export const templateTitle = (id: string, fields: number): string => capital(templateInWords(id, fields));
