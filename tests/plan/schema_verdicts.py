"""Holds the shipped JSON Schema against the parser: same verdict on every plan of the corpus.

A bad plan whose mistake a schema cannot express says so itself, in a line "# schema: silent, WHY";
the schema must then accept it, so that the excuse stays true.
"""
import json
import pathlib
import re
import subprocess
import sys

try:
    import jsonschema
    import yaml
except ImportError as missing:
    print(f"SKIPPED: {missing}")
    sys.exit(77)

TAG = "tag:yaml.org,2002:"


class Core(yaml.SafeLoader):
    """YAML 1.2's core schema, which is what editors use; PyYAML's own is that of YAML 1.1."""

    yaml_implicit_resolvers = {}


def whole(text):
    return int(text, 16 if text.startswith("0x") else 8 if text.startswith("0o") else 10)


def fraction(text):
    return float(text.replace(".inf", "inf").replace(".nan", "nan"))


for name, pattern, make in [
    ("null", r"~|null|Null|NULL|", lambda text: None),
    ("bool", r"true|True|TRUE|false|False|FALSE", lambda text: text.lower() == "true"),
    ("int", r"[-+]?[0-9]+|0o[0-7]+|0x[0-9a-fA-F]+", whole),
    ("float", r"[-+]?(\.[0-9]+|[0-9]+(\.[0-9]*)?)([eE][-+]?[0-9]+)?|[-+]?\.inf|\.nan", fraction),
]:
    Core.add_implicit_resolver(TAG + name, re.compile(f"^(?:{pattern})$"), None)
    Core.add_constructor(TAG + name, lambda loader, node, make=make: make(loader.construct_scalar(node)))


def schema_verdict(validator, text):
    try:
        plan = yaml.load(text, Loader=Core)
    except (yaml.YAMLError, TypeError):  # TypeError: a list as a key
        return "bad"
    return "good" if validator.is_valid(plan) else "bad"


def main(tool, root):
    root = pathlib.Path(root)
    schema = json.loads((root / "pipelines/plan.schema.json").read_text(encoding="utf-8"))
    jsonschema.Draft202012Validator.check_schema(schema)
    validator = jsonschema.Draft202012Validator(schema)
    files = sorted([*(root / "testdata/plans").glob("*/*.yaml"), *(root / "pipelines").glob("*.yaml")])
    told = subprocess.run([tool, "verdict", *map(str, files)], check=True, text=True,
                          stdout=subprocess.PIPE, stderr=subprocess.DEVNULL)
    parser = dict(line.split(" ", 1)[::-1] for line in told.stdout.splitlines())
    wrong = []
    silent = 0
    for file in files:
        text = file.read_text(encoding="utf-8")
        expected = "bad" if file.parent.name == "bad" else "good"
        excused = "# schema: silent" in text
        silent += excused
        by_schema = "good" if excused else expected
        found = (parser[str(file)], schema_verdict(validator, text))
        if found != (expected, by_schema):
            wrong.append(f"{file}: parser {found[0]}, schema {found[1]}; "
                         f"expected {expected}, {by_schema}")
    print(*wrong, sep="\n")
    print(f"{len(files)} plans, {silent} beyond the schema, {len(wrong)} disagree")
    return 1 if wrong or len(files) < 50 else 0


if __name__ == "__main__":
    sys.exit(main(*sys.argv[1:]))
