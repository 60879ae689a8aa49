/**
 * Long loops of the page in short tasks: a click or a key waits for one step at most. All loops share one queue, or ten
 * maps at once would add their steps up to one long task.
 */
const BUDGET_MS = 12;

interface Job {
  steps: Iterator<void>;
  onDone(): void;
}

const queue: Job[] = [];
let isPlanned = false;

function plan(): void {
  if (isPlanned || queue.length === 0) return;
  isPlanned = true;
  setTimeout(work, 0);
}

function work(): void {
  isPlanned = false;
  const until = performance.now() + BUDGET_MS;
  try {
    for (let job = queue[0]; job !== undefined && performance.now() < until; job = queue[0]) step(job);
  } finally {
    plan();
  }
}

function step(job: Job): void {
  // One that throws is off the queue as well, or it would hold up all others.
  let isOver = true;
  try {
    isOver = job.steps.next().done === true;
  } finally {
    if (isOver) remove(job);
  }
  if (isOver) job.onDone();
}

function remove(job: Job): void {
  const place = queue.indexOf(job);
  if (place >= 0) queue.splice(place, 1);
}

/** Runs the steps to their end, a few in each task. The answer takes them off the queue. */
export function runInSteps(steps: Iterator<void>, onDone: () => void): () => void {
  const job = { steps, onDone };
  queue.push(job);
  plan();
  return () => remove(job);
}
