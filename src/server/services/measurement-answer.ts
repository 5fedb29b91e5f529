/** A measurement as every report shows it. */
import type { z } from 'zod';
import type { measurementSchema } from '../../domain/api/deliverables.ts';
import type { MeasurementRecord } from '../db/deliverables-repository.ts';

/** Without what only the service needs of it. */
export const toMeasurementAnswer = (record: MeasurementRecord): z.infer<typeof measurementSchema> => ({
  id: record.id,
  engineVersion: record.engineVersion,
  format: record.format,
  figures: record.figures,
  findings: record.findings,
  measuringSeconds: record.measuringSeconds,
  createdAt: record.createdAt.toISOString(),
});
