"""Errors a user can act on: each names what, why and the cure in one line."""


class LinewrightError(Exception):
    """Base of all refusals.

    Parameters: ``what`` (file or option concerned), ``cause`` and ``cure``; the
    message joins them into one line for the terminal and for notices.
    """

    def __init__(self, what: str, cause: str, cure: str = ""):
        self.what, self.cause, self.cure = str(what), cause, cure
        text = f"{self.what}: {cause}"
        if cure:
            text += f"; {cure}"
        super().__init__(" ".join(text.split()))

    def __reduce__(self):
        """Errors cross from a worker process whole."""
        return type(self), (self.what, self.cause, self.cure)


class InputRefused(LinewrightError):
    """A file or option whose content cannot be used (exit status 1)."""


class MediumUnknown(InputRefused):
    """The spectrum does not say whether its wavelengths are air or vacuum."""


class Cancelled(Exception):
    """Raised inside a job when its progress reporter was told to stop."""
