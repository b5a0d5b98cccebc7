"""HTML from parts: whatever is not markup is text."""

from explorer.report.markup import Markup, element, joined


def test_text_is_escaped_wherever_it_stands():
    """In content and in attributes, with both kinds of quotes."""
    made = element("a", "1 < 2 & \"x\" 'y'", href="\"'<>&")
    assert made == ('<a href="&quot;&#x27;&lt;&gt;&amp;">1 &lt; 2 &amp; &quot;x&quot; &#x27;y&#x27;</a>')


def test_markup_is_escaped_once():
    """An element inside an element stays one."""
    assert element("p", element("b", "<"), " and ", "<") == "<p><b>&lt;</b> and &lt;</p>"


def test_a_text_that_was_put_together_is_no_markup():
    """Adding to markup gives plain text, which is escaped again rather than trusted."""
    assert joined(Markup("<b>") + "<i>") == "&lt;b&gt;&lt;i&gt;"


def test_nothing_leaves_no_trace():
    """None in content and attributes; generators and nested lists are laid out flat."""
    assert element("p", None, [1, [2.5, None]], (str(n) for n in (3,)), class_=None) == "<p>12.53</p>"


def test_names_of_attributes_follow_python_names():
    """A trailing underscore falls away, the others become hyphens."""
    assert element("rect", class_="x", stroke_width=2) == '<rect class="x" stroke-width="2"/>'
