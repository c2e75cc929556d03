import type { CardWarning } from '#shared/model/card-document.ts'
import { compileModel } from '#shared/model/compile.ts'
import { checkModel } from '#shared/model/system.ts'
import { createWarnings } from '#shared/stability/card-warnings.ts'
import { type MapOptions, mapOfPlane, type PlaneMap } from '#shared/stability/map/map-of-plane.ts'
import { documentOf, type ShortModel } from '../documents.ts'

/** A short model with a second control: its value and range. */
export interface PlaneModel extends ShortModel {
  second: Record<string, readonly [value: number, low: number, high: number]>
}

/** The model document. */
export function planeDocument(model: PlaneModel) {
  const [symbol = '', [value, low, high] = [0, 0, 1]] = Object.entries(model.second)[0] ?? []
  const document = documentOf(model)
  return { ...document, parameters: [...document.parameters, { symbol, value, low, high }], secondControl: symbol }
}

/** The map of a document, and what was warned of. */
export function mapOf(document: unknown, options: MapOptions = {}): { map: PlaneMap; warnings: CardWarning[] } {
  const checked = checkModel(document)
  if (!checked.ok) throw new Error(JSON.stringify(checked.errors))
  const warnings = createWarnings([])
  const map = mapOfPlane(compileModel(checked.system), warnings, options)
  if (!map) throw new Error('there is no map')
  return { map, warnings: warnings.list() }
}

export type MapPoint = PlaneMap['curves'][number]['points'][number]

/** The one curve of a kind; throws where there is none or more than one. */
export function onlyCurve(map: PlaneMap, kind: 'onset' | 'fold'): PlaneMap['curves'][number] {
  const [curve, ...more] = map.curves.filter((each) => each.kind === kind)
  if (!curve || more.length > 0) throw new Error(`wanted one ${kind} curve, got ${more.length + (curve ? 1 : 0)}`)
  return curve
}

/** Largest |difference| over the points of a curve. */
export function largest(points: readonly MapPoint[], difference: (point: MapPoint) => number): number {
  return Math.max(...points.map((point) => Math.abs(difference(point))))
}
