// Numbers as the page prints them: at most so many decimals and significant figures (0: any), a real minus.
function number(value, digits, figures, signed) {
  const leading = value ? Math.floor(Math.log10(Math.abs(value))) + 1 : 1
  const text = Math.abs(value).toFixed(figures ? Math.min(digits, Math.max(0, figures - leading)) : digits)
  if (Number(text) === 0) return text
  return (value < 0 ? "−" : signed ? "+" : "") + text
}

// Height of a plot's frame, pixels; a usual one while the plot has not been laid out yet.
function heightOf(figure) {
  return (figure.properties.inner_height.is_unset ? 0 : figure.inner_height) || 200
}
