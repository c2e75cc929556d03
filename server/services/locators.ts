import { type LinkLabel, linkLabels } from '#shared/model/locators.ts'

/** Whether a label of a document is one that links of the library may have. */
export const isKnownLabel = (label: string | undefined): label is LinkLabel => linkLabels.some((one) => one === label)
