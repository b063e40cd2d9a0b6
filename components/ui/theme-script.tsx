/** Where the browser keeps the reader's choice; without one the system's setting rules. */
export const themeKey = 'beatnote-theme';

/** Runs before the first paint, so that a remembered choice never flashes the other colours. */
const boot = `try{var t=localStorage.getItem('${themeKey}');if(t==='light'||t==='dark')document.documentElement.dataset.theme=t}catch{}`;

export function ThemeScript() {
  return <script dangerouslySetInnerHTML={{ __html: boot }} />;
}
