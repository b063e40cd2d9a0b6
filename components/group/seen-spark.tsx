'use client';

import dynamic from 'next/dynamic';
import { useEffect, useRef, useState } from 'react';
import type { NotebookSummary } from '@/lib/schemas';

const NotebookSpark = dynamic(() => import('./notebook-spark').then((m) => m.NotebookSpark), { ssr: false });

/** The small figure of a notebook, made once it comes into sight: a long index asks for nothing that nobody sees. */
export function SeenSpark({ notebook }: { notebook: NotebookSummary }) {
  const holder = useRef<HTMLDivElement>(null);
  const [seen, setSeen] = useState(false);
  useEffect(() => {
    const element = holder.current;
    if (!element) return;
    const observer = new IntersectionObserver((entries) => {
      if (!entries.some(({ isIntersecting }) => isIntersecting)) return;
      setSeen(true);
      observer.disconnect();
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);
  return (
    <div ref={holder} className="h-[35px] w-[120px]">
      {seen ? <NotebookSpark notebook={notebook} /> : null}
    </div>
  );
}
