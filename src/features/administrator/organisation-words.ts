export const STATE_WORDS = { pending: 'Waiting for approval', approved: 'Approved', suspended: 'Suspended' } as const
