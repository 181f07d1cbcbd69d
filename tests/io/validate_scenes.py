"""Holds the printed JSON Schema against an independent validator (python3-jsonschema, draft 2020-12).

usage: validate_scenes.py SCHEMA GOOD_FOLDER BAD_FOLDER
Exit code 0: the schema is valid, every good scene passes, every bad scene whose fault a schema can see fails.
Exit code 1: not so; the differences are printed. Exit code 77: the validator is not installed.
"""

import pathlib
import sys

try:
    import json

    import jsonschema
    import yaml

    Validator = jsonschema.Draft202012Validator
except (ImportError, AttributeError) as error:
    print(error)
    sys.exit(77)

# Faults of form. What the reader finds beyond form (empty bands, objects outside, ...) no schema can say.
SEEN_BY_A_SCHEMA = """
bare_number_for_a_length wrong_unit_for_a_length unit_in_wrong_case bare_number_for_a_frequency
bare_number_for_an_angle bare_number_for_a_level bare_number_for_a_time unit_for_a_plain_number nan infinity
junk_behind_a_number decimal_comma courant_above_one permittivity_below_one unknown_key unknown_key_in_a_block
unknown_shape unknown_word missing_band missing_stop missing_radius list_for_a_block block_for_a_number
number_for_a_list list_too_short two_cells nothing_for_a_value scene_is_a_list key_of_a_later_version
unknown_face_kind mesh_lines_of_a_later_version bad_name several_faults_at_once
two_shapes_in_one_object object_without_a_shape layer_along_two_axes overlapping_pulses reflection_and_sigma
unknown_face illumination_of_nothing dipole_of_both_kinds dipole_with_wrong_unit too_many_layer_cells
cut_short_between_keys
""".split()


def main(schema_path, good_folder, bad_folder):
    schema = json.loads(pathlib.Path(schema_path).read_text(encoding="utf-8"))
    Validator.check_schema(schema)
    validator = Validator(schema)
    wrong = 0
    good = sorted(pathlib.Path(good_folder).glob("*.yaml"))
    for path in good:
        for error in validator.iter_errors(yaml.safe_load(path.read_text(encoding="utf-8"))):
            print(f"{path.name} should pass: {error.message}")
            wrong += 1
    for name in SEEN_BY_A_SCHEMA:
        text = pathlib.Path(bad_folder, name + ".yaml").read_text(encoding="utf-8")
        if validator.is_valid(yaml.safe_load(text)):
            print(f"{name}.yaml should fail")
            wrong += 1
    print(f"{len(good)} good scenes, {len(SEEN_BY_A_SCHEMA)} bad ones, {wrong} differences")
    return 1 if wrong or len(good) < 5 else 0


if __name__ == "__main__":
    sys.exit(main(*sys.argv[1:]))
