"""``digestplan library [KEY]``."""

import argparse

from digestplan.cli import output


def run(chosen: argparse.Namespace) -> None:
    """Write what the library knows: all its keys, or one entry with its sources."""
    from digestplan.report.library_text import entry_document, entry_text, keys_document, keys_text

    if chosen.json:
        from digestplan.report.as_json import dumps

        document = keys_document() if chosen.key is None else entry_document(chosen.key)
        output.write(dumps(document))
        return
    output.write(keys_text() if chosen.key is None else entry_text(chosen.key))
