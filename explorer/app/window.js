// Runs in the page only: what the map holds at the pointer, and which target is missed there first.
// Sends nothing.
const event = cb_obj.event_name
const { start: left, end: right } = x_range, { start: bottom, end: top } = y_range
const x = cb_obj.x, y = cb_obj.y
const outside = event !== "mousemove" || !(x >= left && x <= right && y >= bottom && y <= top)
const { name, values, low, high, slack, digits, figures, signed, unit } = grid.data

const LINE = 16.5, AROUND = 16, APART = 14

function show(lines) {               // beside the pointer, and inside of the plot if there is room
  const far = (x - left) / (right - left) > 0.6
  const height = LINE * lines.length + AROUND, room = heightOf(figure)
  const pointer = (top - y) / (top - bottom) * room
  const upper = Math.max(0, Math.min(pointer - height - APART, room - height))
  tip.data = {
    x: [x], y: [y], text: [lines.join("\n")], dx: [far ? -APART : APART], dy: [upper - pointer],
    anchor: [far ? "top_right" : "top_left"],
  }
}

function place(part, count) {       // the cell a place lies in, and how far in
  const cell = Math.min(Math.max(Math.floor(part * (count - 1)), 0), count - 2)
  return [cell, part * (count - 1) - cell]
}

function at(map, columns, column, row, right_part, up_part) {   // linear between the four points around
  const here = row * columns + column, above = here + columns
  const lower = map[here] + (map[here + 1] - map[here]) * right_part
  const upper = map[above] + (map[above + 1] - map[above]) * right_part
  return lower + (upper - lower) * up_part
}

if (outside || !name.length) {
  if (tip.data.text.length) tip.data = { x: [], y: [], text: [], dx: [], dy: [], anchor: [] }
} else {
  const [columns, rows] = grid.tags
  const [column, right_part] = place((x - left) / (right - left), columns)
  const [row, up_part] = place((y - bottom) / (top - bottom), rows)
  const { name: names, digits: decimals, unit: units } = axes.data
  const both = [x, y].map((value, side) => `${names[side]}: ${number(value, decimals[side], 0, false)} ${units[side]}`.trim())
  const lines = []
  let missed = ""
  let answered = true
  for (let i = 0; i < name.length; i++) {
    const value = at(values[i], columns, column, row, right_part, up_part)
    const aimed = Number.isFinite(low[i]) || Number.isFinite(high[i])
    if (!Number.isFinite(value)) {
      answered &&= !aimed
      lines.push(`${name[i]}: –`)
      continue
    }
    const side = value < low[i] - slack[i] ? "▼ below" : value > high[i] + slack[i] ? "▲ above" : ""
    if (side) missed ||= name[i]
    const shown = number(value, digits[i], figures[i], signed[i])
    lines.push(`${name[i]}: ${shown} ${unit[i]}`.trim() + (side ? `  ${side}` : ""))
  }
  const nearest = Math.round((y - bottom) / (top - bottom) * (rows - 1)) * columns
    + Math.round((x - left) / (right - left) * (columns - 1))
  const reason = lost.data.reason[lost.data.map[0]?.[nearest] ?? 0] ?? ""
  const verdict = reason || !answered ? `no result${reason ? `: ${reason}` : ""}`
    : missed ? `missed first: ${missed}` : grid.tags[2] ? "all targets met" : ""
  show([...both, ...lines, verdict].filter(Boolean))
}
