"""Holds the styles against `styles.rng`, the part of SLD 1.0.0 that they use, and every row of the demo against their rules.

With the path of the OGC's own StyledLayerDescriptor.xsd 1.0.0 in SLD_SCHEMA (its imports beside it, as local files) the
styles are validated against that too. The schema is on no registry that a check can install from, so it is not asked for.
"""

import json
import os
import sys
from pathlib import Path

from lxml import etree

SLD = "{http://www.opengis.net/sld}"
OGC = "{http://www.opengis.net/ogc}"

def holds(rule, properties):
    """Whether a feature passes the filter of a rule."""
    return passes(rule.find(f"{OGC}Filter")[0], properties)


def passes(node, properties):
    kind = etree.QName(node).localname
    if kind == "And":
        return all(passes(child, properties) for child in node)
    value = properties[node.find(f"{OGC}PropertyName").text]
    if kind == "PropertyIsNull":
        return value is None
    literal = node.find(f"{OGC}Literal").text
    if value is None:
        return False
    if kind == "PropertyIsEqualTo":
        return value == literal
    return {"PropertyIsGreaterThanOrEqualTo": value >= float(literal), "PropertyIsLessThan": value < float(literal)}[kind]


def main():
    folder = Path(sys.argv[1])
    schemas = [etree.RelaxNG(file=Path(__file__).with_name("styles.rng"))]
    if official := os.environ.get("SLD_SCHEMA"):
        schemas.append(etree.XMLSchema(file=official))
    # What must be refused is refused.
    planted = (folder / "trails.sld").read_text()
    for right, wrong in (("<Rule>", "<Rule><Size>3</Size>"), ("#d55e00", "orange"), ("PropertyIsEqualTo", "PropertyIsSame"),
                         ("<IsDefault>1", "<IsDefault>perhaps"), ("<LineSymbolizer>", "<LineSymbolizer><Fill/>")):
        assert right in planted
        fault = etree.fromstring(planted.replace(right, wrong).encode())
        assert not schemas[0].validate(fault), wrong
    for layer in ("boulders", "trails"):
        document = etree.parse(folder / f"{layer}.sld")
        for schema in schemas:
            schema.assertValid(document)
        root = document.getroot()
        rows = [f["properties"] for f in json.loads((folder / f"{layer}.geojson").read_text())["features"]]
        for style in root.iter(f"{SLD}UserStyle"):
            rules = list(style.iter(f"{SLD}Rule"))
            for row in rows:
                drawn = [rule.find(f"{SLD}Title").text for rule in rules if holds(rule, row)]
                assert len(drawn) == 1, (layer, style.find(f"{SLD}Name").text, drawn, row)
        against = "the part of SLD 1.0.0 in styles.rng" + (" and the schema of the OGC" if official else "")
        print(f"styles: {layer}.sld is valid by {against}; every one of {len(rows)} {layer} is drawn by exactly one rule of each style")


main()
