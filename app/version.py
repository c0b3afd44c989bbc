"""Which version of the program runs, where it is known."""


def version() -> str:
    """Such as `0.1.0`."""
    from importlib import metadata  # slow to load, and seldom asked for

    try:
        return metadata.version("farend")
    except metadata.PackageNotFoundError:
        return "not known"
