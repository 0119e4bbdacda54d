"""What the stack says when it cannot go on."""


class StackError(Exception):
    """A start or a child failed; the text is one the operator can act on."""
