import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useEffect, useState } from 'react';
import type { z } from 'zod';
import { api } from '@/components/live/api.ts';
import {
  decisionsResultSchema,
  submissionRowSchema,
  type decisionSchema,
  type SubmissionRow,
} from '@/domain/api/submissions.ts';
import { submissionStateNames } from '@/domain/vocabulary.ts';
import { rowName } from './review-list.ts';

export type Decision = z.input<typeof decisionSchema>;

/** What the server answered about one row. */
export interface DecisionAnswer {
  id: string;
  name: string;
  ok: boolean;
  sentence: string;
  /** Milliseconds of this computer's clock until which it can be taken back; `null` when it cannot. */
  takeBackUntilMs: number | null;
}

const batch = 200;

/** Decides on rows and takes decisions back; keeps the answer to each row until it is put away. */
export function useDecisions() {
  const client = useQueryClient();
  const [answers, setAnswers] = useState<DecisionAnswer[]>([]);
  const readAnew = () => client.invalidateQueries({ queryKey: ['submissions'] });

  const deciding = useMutation({
    mutationFn: async ({
      rows,
      decisionOf,
    }: {
      rows: SubmissionRow[];
      decisionOf: (row: SubmissionRow) => Decision;
    }) => {
      const names = new Map(rows.map((row) => [row.id, `${rowName(row)} to ${row.channel.name}`]));
      setAnswers([]);
      // The contract takes two hundred at a time; what was answered before a break stands and is shown.
      for (let from = 0; from < rows.length; from += batch) {
        const { items } = await api.send(
          'POST',
          '/api/v1/submissions/decisions',
          { items: rows.slice(from, from + batch).map(decisionOf) },
          decisionsResultSchema,
        );
        const some = items.map((item): DecisionAnswer => ({
          id: item.id,
          name: names.get(item.id) ?? item.id,
          ok: item.ok,
          sentence: item.ok ? submissionStateNames[item.value.state] : item.error.message,
          takeBackUntilMs: item.ok && item.value.takeBackUntil ? Date.parse(item.value.takeBackUntil) : null,
        }));
        setAnswers((before) => [...before, ...some]);
      }
    },
    onSettled: readAnew,
  });

  const takingBack = useMutation({
    mutationFn: async (ids: string[]) => {
      for (const id of ids) {
        let sentence = 'Taken back; it awaits a decision again.';
        let ok = true;
        try {
          await api.send('POST', `/api/v1/submissions/${id}/take-back`, {}, submissionRowSchema);
        } catch (error) {
          ok = false;
          sentence = error instanceof Error ? error.message : String(error);
        }
        setAnswers((before) =>
          before.map((one) => (one.id === id ? { ...one, ok, sentence, takeBackUntilMs: null } : one)),
        );
      }
    },
    onSettled: readAnew,
  });

  // The offer to take back ends when the time does.
  const ends = answers.flatMap(({ takeBackUntilMs }) => takeBackUntilMs ?? []);
  const nextEnd = ends.length > 0 ? Math.min(...ends) : null;
  useEffect(() => {
    if (nextEnd === null) return;
    const timer = setTimeout(
      () =>
        setAnswers((before) =>
          before.map((one) =>
            one.takeBackUntilMs !== null && one.takeBackUntilMs <= nextEnd
              ? { ...one, takeBackUntilMs: null }
              : one,
          ),
        ),
      Math.max(0, nextEnd - Date.now()),
    );
    return () => clearTimeout(timer);
  }, [nextEnd]);

  return {
    answers,
    putAway: () => setAnswers([]),
    decide: (rows: SubmissionRow[], decisionOf: (row: SubmissionRow) => Decision) =>
      deciding.mutate({ rows, decisionOf }),
    takeBack: (ids: string[]) => takingBack.mutate(ids),
    busy: deciding.isPending || takingBack.isPending,
    trouble: deciding.error?.message ?? null,
  };
}
