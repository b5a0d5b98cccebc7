// Runs in the page only: rings on the operating point, values under the pointer in all plots at once, and
// dragging or tapping anywhere in a plot to move the operating point. Sends nothing but the point's place.
const state = (window.blendwrightSweep ??= new WeakMap())
const mine = state.get(point) ?? { hover: null }
state.set(point, mine)

const event = cb_obj.event_name
const inside = (x) => x >= Math.min(x_range.start, x_range.end) && x <= Math.max(x_range.start, x_range.end)
const clamp = (x) => Math.min(Math.max(x, Math.min(x_range.start, x_range.end)), Math.max(x_range.start, x_range.end))

if (event === "mousemove") mine.hover = inside(cb_obj.x) ? cb_obj.x : null
else if (event === "mouseleave") mine.hover = null
else if (event === "tap" || event === "panstart" || event === "pan") {
  mine.hover = null
  if (event !== "tap" || inside(cb_obj.x)) point.location = clamp(cb_obj.x)   // comes back here as a change of the point
}

function at(xs, ys, x) {         // linear between neighbours; nan next to a gap
  let low = 0, high = xs.length - 1
  if (high < 1 || !(x >= xs[0] && x <= xs[high])) return NaN
  while (high - low > 1) {
    const middle = (low + high) >> 1
    if (xs[middle] <= x) low = middle
    else high = middle
  }
  if (x === xs[low]) return ys[low]
  return ys[low] + (ys[high] - ys[low]) * (x - xs[low]) / (xs[high] - xs[low])
}

function number(value, digits, figures, signed) {
  const leading = value ? Math.floor(Math.log10(Math.abs(value))) + 1 : 1
  const text = Math.abs(value).toFixed(figures ? Math.min(digits, Math.max(0, figures - leading)) : digits)
  if (Number(text) === 0) return text
  return (value < 0 ? "−" : signed ? "+" : "") + text
}

const where = mine.hover ?? point.location
for (const part of parts) {
  const { xs, ys, colour, label, digits, figures, signed } = part.lines.data
  const low = Math.min(part.y_range.start, part.y_range.end), span = Math.abs(part.y_range.end - part.y_range.start)
  const rings = { x: [], y: [], colour: [] }
  const labels = []
  for (let i = 0; i < xs.length; i++) {
    const own = at(xs[i], ys[i], point.location)
    if (Number.isFinite(own) && own >= low - 1e-9 * span && own <= low + span * (1 + 1e-9)) {
      rings.x.push(point.location); rings.y.push(own); rings.colour.push(colour[i])
    }
    const value = at(xs[i], ys[i], where)
    if (Number.isFinite(value) && (mine.hover !== null || xs.length === 1))
      labels.push({ y: value, text: (label[i] ? label[i] + " " : "") + number(value, digits[i], figures[i], signed[i]), colour: colour[i] })
  }
  // Labels keep their order and never cover each other; near the top or bottom they stay inside.
  const gap = 19 * span / Math.max(60, part.figure.inner_height || 200)
  labels.sort((a, b) => a.y - b.y)
  labels.forEach((item, i) => { item.at = Math.max(item.y, low + gap / 2, i ? labels[i - 1].at + gap : -Infinity) })
  for (let i = labels.length - 1, top = low + span - gap / 2; i >= 0; i--) {
    labels[i].at = Math.min(labels[i].at, top)
    top = labels[i].at - gap
  }
  const left = (where - x_range.start) / (x_range.end - x_range.start) > 0.72
  part.rings.data = rings
  part.labels.data = {
    x: labels.map(() => where), y: labels.map((item) => item.at), text: labels.map((item) => item.text),
    colour: labels.map((item) => item.colour), dx: labels.map(() => left ? -9 : 9),
    align: labels.map(() => left ? "right" : "left"),
  }
}
