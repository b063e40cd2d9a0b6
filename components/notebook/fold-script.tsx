'use client';

/**
 * Runs as soon as the sections are there and before they are painted, so that one that was folded isn't shown open
 * until the page's own script takes over. On a page that is put together in the browser there is nothing to do.
 */
export function FoldScript({ storageKey }: { storageKey: string }) {
  const key = JSON.stringify(storageKey).replace(/</g, '\\u003c');
  const text = `try{var f=JSON.parse(localStorage.getItem(${key})||'{}');for(var i in f){var s=document.getElementById(i);if(s&&s.hasAttribute('data-fold')&&(f[i]==='open'||f[i]==='folded'))s.dataset.fold=f[i]}}catch{}`;
  return (
    <script
      suppressHydrationWarning
      type={typeof window === 'undefined' ? 'text/javascript' : 'text/plain'}
      dangerouslySetInnerHTML={{ __html: text }}
    />
  );
}
