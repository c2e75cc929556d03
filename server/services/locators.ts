import { type LocatorLabel, locatorLabels } from '#shared/api/sources.ts'

/** Whether a label of a document is one that links of the library may have. */
export const isKnownLabel = (label: string | undefined): label is LocatorLabel =>
  locatorLabels.some((one) => one === label)
