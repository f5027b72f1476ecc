"""Holds the styles against SLD 1.0.0 (OGC 02-070): order and names of elements as in its schema, filters and marks.

The schema's own files are not kept here; the content models below were compared by eye with a public copy of
StyledLayerDescriptor.xsd 1.0.0 down to the line symbolizer, the rest is recalled. That is weaker than validation.
"""

import json
import sys
from pathlib import Path

from lxml import etree

SLD = "{http://www.opengis.net/sld}"
OGC = "{http://www.opengis.net/ogc}"
CHILDREN = {
    "StyledLayerDescriptor": ["NamedLayer"],
    "NamedLayer": ["Name", "UserStyle"],
    "UserStyle": ["Name", "Title", "IsDefault", "FeatureTypeStyle"],
    "FeatureTypeStyle": ["Rule"],
    "Rule": ["Title", "Filter", "PointSymbolizer", "LineSymbolizer"],
    "PointSymbolizer": ["Graphic"],
    "LineSymbolizer": ["Stroke"],
    "Graphic": ["Mark", "Size"],
    "Mark": ["WellKnownName", "Fill", "Stroke"],
    "Fill": ["CssParameter"],
    "Stroke": ["CssParameter"],
}
MARKS = {"square", "circle", "triangle", "star", "cross", "x"}


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
    for layer in ("boulders", "trails"):
        root = etree.parse(folder / f"{layer}.sld").getroot()
        assert root.tag == f"{SLD}StyledLayerDescriptor" and root.get("version") == "1.0.0"
        for node in root.iter(f"{SLD}*"):
            name = etree.QName(node).localname
            places = [CHILDREN[name].index(etree.QName(child).localname) for child in node] if name in CHILDREN else []
            assert places == sorted(places), (layer, name, places)
            assert name in CHILDREN or len(node) == 0, (layer, name)
        assert {m.text for m in root.iter(f"{SLD}WellKnownName")} <= MARKS
        rows = [f["properties"] for f in json.loads((folder / f"{layer}.geojson").read_text())["features"]]
        for style in root.iter(f"{SLD}UserStyle"):
            rules = list(style.iter(f"{SLD}Rule"))
            for row in rows:
                drawn = [rule.find(f"{SLD}Title").text for rule in rules if holds(rule, row)]
                assert len(drawn) == 1, (layer, style.find(f"{SLD}Name").text, drawn, row)
        print(f"styles: every one of {len(rows)} {layer} is drawn by exactly one rule of each style")


main()
