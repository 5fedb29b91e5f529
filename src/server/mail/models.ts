/** What each kind of mail says, as data: the caller gives facts, templates.ts makes the words. */
import type { OverallOutcome, Role } from '../../domain/vocabulary.ts';

interface SubmissionFacts {
  submissionId: string;
  deliverableId: string;
  fileName: string;
  programmeTitle: string | null;
  episodeLabel: string | null;
  channelName: string;
}

export interface MailModels {
  invitation: {
    organisationName: string;
    inviterName: string;
    roles: readonly Role[];
    token: string;
    expiresAt: Date;
  };
  password_reset: { name: string; token: string; expiresAt: Date };
  submission_received: SubmissionFacts & {
    supplierName: string;
    outcome: OverallOutcome;
    /** The verdict's `nearestText`. */
    nearestText: string;
    airAt: Date | null;
    /** The channel's, for the air date. */
    timeZone: string;
  };
  submission_approved: SubmissionFacts & {
    distributorName: string;
    /** Empty for a plain approval. */
    waivers: readonly { ruleName: string; reason: string }[];
  };
  submission_rejected: SubmissionFacts & {
    distributorName: string;
    reason: string;
    /** Rules that the operator named or that failed: texts of the rule verdicts. */
    failingRules: readonly { name: string; judgedText: string; permittedText: string; marginText: string }[];
  };
}
export type MailKind = keyof MailModels;

export interface MailWords {
  subject: string;
  text: string;
  html: string;
}
