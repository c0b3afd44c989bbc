"""What goes wrong with files, for people."""


class FileError(ValueError):
    """Why a file cannot be read or written, as one sentence."""
