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

// Labels keep their order and never cover each other; near the top or bottom they stay inside.
function settle(labels, gap, low, high) {
  labels.sort((a, b) => a.y - b.y)
  labels.forEach((item, i) => { item.at = Math.max(item.y, low, i ? labels[i - 1].at + gap : -Infinity) })
  for (let i = labels.length - 1, top = high; i >= 0; i--) {
    labels[i].at = Math.min(labels[i].at, top)
    top = labels[i].at - gap
  }
  return labels
}
const [place_digits, place_unit, scale] = point.tags.length ? point.tags : [0, "", 1]
const column = (items, key) => items.map((item) => item[key])

function draw() {
  const hovering = mine.hover !== null && inside(mine.hover)     // the range may have changed since
  const where = hovering ? mine.hover : point.location
  const left = (where - x_range.start) / (x_range.end - x_range.start) > 0.72
  for (const part of parts) {
    const { xs, ys, colour, label, digits, figures, signed, unit } = part.lines.data
    const low = Math.min(part.y_range.start, part.y_range.end), span = Math.abs(part.y_range.end - part.y_range.start)
    const pixel = span / Math.max(60, heightOf(part.figure))
    const rings = [], labels = [], ends = []
    for (let i = 0; i < xs.length; i++) {
      const own = at(xs[i], ys[i], point.location)
      if (own >= low - pixel && own <= low + span + pixel) rings.push({ x: point.location, y: own, colour: colour[i] })
      const value = at(xs[i], ys[i], where)
      if (Number.isFinite(value) && (hovering || xs.length === 1)) labels.push({
        y: value, colour: colour[i],
        text: (label[i] ? label[i] + " " : "") + number(value, digits[i], figures[i], signed[i])
          + (label[i] && unit[i] === "%" ? " %" : ""),
      })
      let last = ys[i].length - 1
      while (last >= 0 && !Number.isFinite(ys[i][last])) last--
      if (label[i] && last >= 0) ends.push({ y: ys[i][last], text: label[i], colour: colour[i] })
    }
    const { data } = part.others
    data.xs.forEach((line, i) => {
      const value = at(line, data.ys[i], where)
      if (hovering && Number.isFinite(value))
        labels.push({ y: value, colour: data.colour[i], text: data.label[i] + " " + number(value, digits[0], figures[0], signed[0]) })
      let last = data.ys[i].length - 1
      while (last >= 0 && !Number.isFinite(data.ys[i][last])) last--
      if (last >= 0) ends.push({ y: data.ys[i][last], text: data.label[i], colour: data.colour[i] })
    })
    const several = xs.length > 1 || (hovering && data.xs.length > 0)
    if (hovering) labels.push({
      y: low, colour: part.axis.major_label_text_color,
      text: number(where, place_digits, 0, false) + (place_unit ? " " + place_unit : ""),
    })
    settle(labels, 19 * scale * pixel, low + 9 * scale * pixel, low + span - 9 * scale * pixel)
    settle(ends, 15 * scale * pixel, low, low + span)
    part.rings.data = { x: column(rings, "x"), y: column(rings, "y"), colour: column(rings, "colour") }
    part.labels.data = {
      x: labels.map(() => where), y: column(labels, "at"), text: column(labels, "text"), colour: column(labels, "colour"),
      dx: labels.map(() => left ? -9 : 9),
      // A single value stands clear of its curve: above it, or below where there is no room.
      dy: labels.map((item) => several || item.y === low ? 0 : item.y > low + 0.88 * span ? 14 * scale : -14 * scale),
      align: labels.map(() => left ? "right" : "left"),
    }
    part.ends.data = {
      x: ends.map(() => x_range.end), y: column(ends, "at"), text: column(ends, "text"), colour: column(ends, "colour"),
    }
  }
}

// One message of the server changes many columns; the labels follow once, before the page is painted.
if (!mine.due) {
  mine.due = true
  queueMicrotask(() => { mine.due = false; draw() })
}
