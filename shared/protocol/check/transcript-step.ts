import { StepFailure } from '#shared/protocol/check/failure.ts'
import type { CheckStep } from '#shared/protocol/check/state.ts'

/** Step 11: the transcript's digest (PROTOCOL section 8), taken while step 9 read the transcript. */
export const checkTranscriptDigest: CheckStep = ({ result, transcriptDigest }) => {
  if (result.transcript !== transcriptDigest) {
    throw new StepFailure(
      'transcript-mismatch',
      'result.json transcript',
      'This is not the digest of transcript.jsonl.',
    )
  }
  return `transcript.jsonl has the digest that the result states, ${transcriptDigest}.`
}
