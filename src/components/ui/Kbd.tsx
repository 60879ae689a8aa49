export function Kbd({ children }: { children: string }) {
  return (
    <kbd className="rounded-sm border border-strong px-1 py-px font-mono text-xs text-dim">{children}</kbd>
  );
}
