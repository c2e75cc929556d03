/**
 * Outline of a revision cloud around a box: arcs of about `scallop` px that bulge outwards, the same number on opposite
 * sides. The box is inset by half an arc so that the bulges stay inside it.
 */
export function cloudPath(width: number, height: number, scallop = 18): string {
  const inset = 4
  const w = Math.max(scallop, width - 2 * inset)
  const h = Math.max(scallop, height - 2 * inset)
  const across = Math.max(1, Math.round(w / scallop))
  const down = Math.max(1, Math.round(h / scallop))
  const arc = (dx: number, dy: number) => {
    const r = Math.hypot(dx, dy) * 0.56
    return `a${round(r)} ${round(r)} 0 0 1 ${round(dx)} ${round(dy)}`
  }
  return [
    `M${inset} ${inset}`,
    ...Array.from({ length: across }, () => arc(w / across, 0)),
    ...Array.from({ length: down }, () => arc(0, h / down)),
    ...Array.from({ length: across }, () => arc(-w / across, 0)),
    ...Array.from({ length: down }, () => arc(0, -h / down)),
    'z',
  ].join('')
}

const round = (value: number) => Math.round(value * 100) / 100
