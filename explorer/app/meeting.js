// The meeting view is a state of the whole page: an attribute of the root element, which all styles read.
export function render({ model }) {
  const view = document.createElement("div")
  view.className = "live-view"
  const bar = view.appendChild(document.createElement("div"))
  bar.className = "bar"
  const button = bar.appendChild(document.createElement("button"))
  button.type = "button"
  button.className = "press"
  const show = () => {
    document.documentElement.toggleAttribute("data-meeting", model.active)
    button.textContent = model.active ? "Leave meeting view" : "Meeting view"
    button.title = model.active ? "Back to the desk (Esc)" : "Large type, one large plot and the few dials in play"
    button.setAttribute("aria-pressed", String(model.active))
  }
  model.on("active", show)
  show()
  const turn = (on) => model.send_msg({ on })
  button.addEventListener("click", () => turn(!model.active))
  const onKey = (event) => {
    const target = event.composedPath()[0]
    const typing = ["INPUT", "SELECT", "TEXTAREA"].includes(target.tagName) && target.type !== "range"
    if (event.key === "Escape" && model.active && !typing && !target.closest?.("[popover]") && !event.defaultPrevented) turn(false)
  }
  document.addEventListener("keydown", onKey)
  model.on("remove", () => document.removeEventListener("keydown", onKey))
  return view
}
