"""What a person sees, types, clicks and downloads: pages, command line, start."""

import sys

__version__ = "0.1.0"

if sys.version_info < (3, 11):  # noqa: UP036  an older Python gets this far from a checkout
    sys.exit(
        "Twistfront needs Python 3.11 or newer; this is Python %d.%d. "  # noqa: UP031
        "Start it with a newer one, for example: python3.12 -m explorer" % sys.version_info[:2]
    )
