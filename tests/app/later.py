"""A runner for tests of what happens while a calculation runs."""


class Later:
    """A runner that waits until it is told to work, as the page's does while a calculation runs."""

    def __init__(self) -> None:
        self.waiting = []

    def submit(self, compute, apply) -> None:
        self.waiting = [(compute, apply)]

    def work(self) -> None:
        for compute, apply in self.waiting:
            apply(compute())
        self.waiting = []
