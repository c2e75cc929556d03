import { ApiProblem } from './api-problem.ts'

/** Why an act was not done, as the screens say it: what happened, what still holds, and what to do first. */
export interface ActWords {
  headline: string
  /** What holds. Empty where the headline says it all. */
  text: string
  first: 'read-again' | 'open-page' | 'sign-in' | null
}

/**
 * The words for an act on a revision that was refused, by the code of the problem.
 *
 * @param notDone  what was not done, for what still holds: "Nothing is signed."
 */
export function actWords(error: Error, notDone: string): ActWords {
  const code = error instanceof ApiProblem ? error.code : null
  switch (code) {
    case 'changed':
      return { headline: 'It changed while you were reading', text: notDone, first: 'read-again' }
    case 'may-not':
      // What is allowed depends on the state of the page: settled by somebody else, nothing is left to settle.
      return {
        headline: error.message,
        text: `${notDone} It may have been settled meanwhile.`,
        first: 'read-again',
      }
    case 'already-settled':
      return {
        headline: 'Already settled by somebody else',
        text: `${notDone} What you wrote is kept in this tab.`,
        first: 'read-again',
      }
    case 'base-superseded':
      return {
        headline: 'A newer revision is in force',
        text: `${notDone} This one was compared with another: return it, so that it can be sent again.`,
        first: 'open-page',
      }
    case 'not-signed-in':
      return {
        headline: 'You were signed out',
        text: `${notDone} What you wrote is kept in this tab, for you only.`,
        first: 'sign-in',
      }
    case 'network':
    case 'not-ready':
    case 'bug':
      return {
        headline: 'The library did not answer',
        text: `It is not known whether it took this. Read the page again before you try once more.`,
        first: 'read-again',
      }
    default:
      return { headline: error.message, text: '', first: null }
  }
}
