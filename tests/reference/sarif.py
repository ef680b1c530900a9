"""Holds SARIF written by bandloom against the published schema.

    python3 sarif.py sarif-schema-2.1.0.json findings.sarif …

The schema is OASIS Static Analysis Results Interchange Format (SARIF) Version 2.1.0,
sarif-schema-2.1.0.json, which is not kept here. Needs jsonschema (run with 4.x).
"""

import json
import sys

import jsonschema

schema = json.load(open(sys.argv[1], encoding="utf-8"))
validator = jsonschema.Draft7Validator(schema, format_checker=jsonschema.FormatChecker())
wrong = 0
for path in sys.argv[2:]:
    document = json.load(open(path, encoding="utf-8"))
    for error in validator.iter_errors(document):
        wrong += 1
        print(path, "/".join(map(str, error.absolute_path)), error.message)
print(f"jsonschema {jsonschema.__version__}: {wrong} violations in {len(sys.argv) - 2} files")
sys.exit(wrong > 0)
