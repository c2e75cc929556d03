import { superscript } from '#shared/stability/numbers.ts'
import type { Axis, Frame } from './geometry/frame.ts'
import type { Quantity } from './geometry/subject.ts'
import { SvgSymbol } from './svg-symbol.tsx'

/** The unit the axis numbers are in: "mm", "10³ mm", or "10³" for a pure number. */
export function axisUnit(unit: string, axis: Axis): string {
  if (axis.exponent === 0) return unit
  const power = superscript(axis.exponent)
  return unit ? `10${power} ${unit}` : `in 10${power}`
}

/** "running speed V, m/s": quantity, symbol and unit in words. */
export function QuantityTspans({ quantity, axis, before = '' }: { quantity: Quantity; axis: Axis; before?: string }) {
  const unit = axisUnit(quantity.unit, axis)
  return (
    <>
      {before}
      {quantity.meaning && `${quantity.meaning} `}
      <SvgSymbol name={quantity.symbol} />
      {unit && `, ${unit}`}
    </>
  )
}

/** Pencil grid, axis numbers outside only, and what the axes carry. Numbers near the running point give way to it. */
export function Axes({
  frame,
  control,
  observed,
  flat,
  swings,
  lowest,
  runningX,
}: {
  frame: Frame
  control: Quantity
  observed: Quantity
  flat: boolean
  /** An oscillation is drawn as well. */
  swings: boolean
  /** Pixel of the lowest curve: an amplitude has no numbers below zero. */
  lowest: number
  runningX: number | null
}) {
  const { plot, x, y, small, width } = frame
  const yTicks = flat ? y.ticks.filter((tick) => tick.at <= lowest + 1) : y.ticks
  const inPlot = (at: number) => at >= plot.left - 0.5 && at <= plot.right + 0.5
  const before = flat ? 'amplitude of ' : ''
  const after = flat || small ? '' : swings ? ': steady state, and highest and lowest in a swing' : ': steady state'
  return (
    <g aria-hidden>
      {yTicks.map((tick) => (
        <path
          key={tick.at}
          d={`M${plot.left} ${tick.at}H${plot.right}`}
          stroke="var(--color-pencil)"
          strokeWidth="0.75"
          opacity="0.55"
        />
      ))}
      <path d={`M${plot.left} ${plot.bottom}H${plot.right}`} stroke="var(--color-line)" strokeWidth="1" />
      <g className="figures" fontSize="11" fill="var(--color-ink)">
        {yTicks.map((tick) => (
          <text key={tick.at} x={plot.left - 8} y={tick.at + 4} textAnchor="end">
            {tick.text}
          </text>
        ))}
        {x.ticks
          .filter((tick) => inPlot(tick.at))
          .map((tick) => (
            <g key={tick.at}>
              <path d={`M${tick.at} ${plot.bottom}v5`} stroke="var(--color-line)" strokeWidth="1" />
              {(runningX === null || Math.abs(tick.at - runningX) >= 24) && (
                <text
                  x={Math.min(tick.at, width - 4 - (tick.text.length * 6.9) / 2)}
                  y={plot.bottom + 19}
                  textAnchor="middle"
                >
                  {tick.text}
                </text>
              )}
            </g>
          ))}
      </g>
      <g fontSize="13" fill="var(--color-ink-2)">
        <text x={small ? 2 : plot.left} y={15} textAnchor="start">
          <QuantityTspans quantity={observed} axis={y} before={before} />
          {after}
        </text>
        <text x={plot.right} y={plot.bottom + (small ? 58 : 52)} textAnchor="end">
          <QuantityTspans quantity={control} axis={x} />
        </text>
      </g>
    </g>
  )
}
