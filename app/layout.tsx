import type { Metadata, Viewport } from 'next';
import type { ReactNode } from 'react';
import '@fontsource-variable/source-serif-4/opsz.css';
import '@fontsource-variable/source-serif-4/opsz-italic.css';
import '@fontsource-variable/instrument-sans/wght.css';
import '@fontsource-variable/spline-sans-mono/wght.css';
import 'katex/dist/katex.min.css';
import './globals.css';
import { ThemeScript } from '@/components/ui/theme-script';

export const metadata: Metadata = {
  title: { default: 'Beatnote', template: '%s · Beatnote' },
  description: 'From a measured squeezed bispectrum to a statement about heavy fields during inflation',
};

export const viewport: Viewport = {
  colorScheme: 'light dark',
  themeColor: [
    { media: '(prefers-color-scheme: light)', color: '#faf6ee' },
    { media: '(prefers-color-scheme: dark)', color: '#191713' },
  ],
};

export default function RootLayout({ children }: { children: ReactNode }) {
  return (
    <html lang="en" suppressHydrationWarning>
      <head>
        <ThemeScript />
      </head>
      <body>
        <a
          href="#text"
          className="no-print absolute left-2 -top-16 z-10 bg-paper px-2 py-1 text-control font-controls focus:top-1"
        >
          To the text
        </a>
        {children}
      </body>
    </html>
  );
}
