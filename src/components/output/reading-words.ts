import type { InspectionFacts } from '../../../shared/contracts/engine';
import { formatCount } from '../../lib/format-number';

/** Amounts for reading: 41.2 M, 12.0 k. */
export function shortCount(count: number): string {
  if (count >= 1e9) return `${(count / 1e9).toFixed(2)} G`;
  if (count >= 1e6) return `${(count / 1e6).toFixed(1)} M`;
  if (count >= 1e4) return `${(count / 1e3).toFixed(1)} k`;
  return formatCount(count);
}

export function bytesWords(bytes: number): string {
  if (bytes >= 1e9) return `${(bytes / 1e9).toFixed(2)} GB`;
  if (bytes >= 1e6) return `${(bytes / 1e6).toFixed(1)} MB`;
  if (bytes >= 1e3) return `${(bytes / 1e3).toFixed(1)} kB`;
  return `${bytes} bytes`;
}

export function factsWords(facts: InspectionFacts): string {
  if (facts.kind === 'tags')
    return `${shortCount(facts.records)} records · ${facts.channels.length} channels`;
  if (facts.kind === 'frames')
    return `${shortCount(facts.frames)} frames · ${facts.width} × ${facts.height} · ${facts.type}`;
  return 'nothing decoded';
}

export function durationWords(seconds: number): string {
  if (!Number.isFinite(seconds)) return 'unknown';
  if (seconds < 10) return `${seconds.toFixed(1)} s`;
  if (seconds < 120) return `${Math.round(seconds)} s`;
  return `${Math.round(seconds / 60)} min`;
}
