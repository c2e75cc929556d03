/** What is being computed of a card, in this order. */
export const cardStages = ['steady-states', 'branches', 'onsets', 'window', 'sensitivity', 'map'] as const
export type CardStage = (typeof cardStages)[number]
