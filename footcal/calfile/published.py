"""The JSON Schema of the calibration file, published beside the code for readers in other languages.

Run `python -m footcal.calfile.published` after a change of schema.py; a test compares.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Final

from footcal.calfile.schema import VERSION, CalibrationFile
from footcal.files.atomic import replacing

SCHEMA_PATH: Final = Path(__file__).with_name("schema.json")


def schema_text() -> str:
    """Return the schema as it should stand in the file."""
    schema = {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": f"footcal calibration file, version {VERSION}",
        **{key: value for key, value in CalibrationFile.model_json_schema().items() if key != "title"},
    }
    return json.dumps(schema, indent=1, sort_keys=True) + "\n"


if __name__ == "__main__":
    with replacing(SCHEMA_PATH) as temporary:
        temporary.write_text(schema_text(), encoding="utf-8")
