//! Styles of the boulder and trail layers: OGC Styled Layer Descriptor 1.0.0 (OGC 02-070).
//!
//! Each file holds two styles. Boulders: by source likelihood (the default) and by spall thickness, both graduated. Trails:
//! by proposal (the default, categorised) and by likelihood (graduated). What was not assessed has a look of its own in
//! each. Classes, colours and shapes are those of [`super::looks`], so map and page agree.

use std::fmt::Write;

use super::chart::escaped;
use super::looks::{
    Class, Mark, NOT_ASSESSED_COLOUR, NOT_ASSESSED_MARK, OUTLINE, PROPOSAL_LOOKS, REACH_CLASSES, SOURCE_CLASSES,
    THICKNESS_CLASSES,
};

const HEAD: &str = "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n\
                    <StyledLayerDescriptor version=\"1.0.0\" xmlns=\"http://www.opengis.net/sld\" \
                    xmlns:ogc=\"http://www.opengis.net/ogc\" xmlns:xlink=\"http://www.w3.org/1999/xlink\" \
                    xmlns:xsi=\"http://www.w3.org/2001/XMLSchema-instance\" \
                    xsi:schemaLocation=\"http://www.opengis.net/sld \
                    http://schemas.opengis.net/sld/1.0.0/StyledLayerDescriptor.xsd\">\n";

/// A style: name, title, whether it is the default, rules.
fn style(name: &str, title: &str, default: bool, rules: &str) -> String {
    format!(
        "    <UserStyle>\n      <Name>{}</Name>\n      <Title>{}</Title>\n      <IsDefault>{}</IsDefault>\n      \
         <FeatureTypeStyle>\n{rules}      </FeatureTypeStyle>\n    </UserStyle>\n",
        escaped(name),
        escaped(title),
        u8::from(default)
    )
}

fn document(layer: &str, styles: &[String]) -> String {
    format!(
        "{HEAD}  <NamedLayer>\n    <Name>{layer}</Name>\n{}  </NamedLayer>\n</StyledLayerDescriptor>\n",
        styles.concat()
    )
}

fn rule(title: &str, filter: &str, symbol: &str) -> String {
    format!(
        "        <Rule>\n          <Title>{}</Title>\n          <ogc:Filter>{filter}</ogc:Filter>\n{symbol}        </Rule>\n",
        escaped(title)
    )
}

fn compared(operator: &str, property: &str, value: &str) -> String {
    format!(
        "<ogc:{operator}><ogc:PropertyName>{property}</ogc:PropertyName><ogc:Literal>{}</ogc:Literal></ogc:{operator}>",
        escaped(value)
    )
}

fn null(property: &str) -> String {
    format!("<ogc:PropertyIsNull><ogc:PropertyName>{property}</ogc:PropertyName></ogc:PropertyIsNull>")
}

fn and(filters: &[String]) -> String {
    format!("<ogc:And>{}</ogc:And>", filters.concat())
}

/// The filter of a class; the last one of its list is open above.
fn within(property: &str, class: &Class, last: bool) -> String {
    let from = compared("PropertyIsGreaterThanOrEqualTo", property, &class.from.to_string());
    if last { from } else { and(&[from, compared("PropertyIsLessThan", property, &class.to.to_string())]) }
}

fn parameter(name: &str, value: &str) -> String {
    format!("<CssParameter name=\"{name}\">{value}</CssParameter>")
}

fn point(mark: Mark, fill: &str, size_px: u32) -> String {
    format!(
        "          <PointSymbolizer><Graphic><Mark><WellKnownName>{}</WellKnownName><Fill>{}</Fill><Stroke>{}{}</Stroke>\
         </Mark><Size>{size_px}</Size></Graphic></PointSymbolizer>\n",
        mark.word(),
        parameter("fill", fill),
        parameter("stroke", OUTLINE),
        parameter("stroke-width", "1.2")
    )
}

fn line(colour: &str, width_px: u32, dashes: &str) -> String {
    let mut stroke = parameter("stroke", colour) + &parameter("stroke-width", &width_px.to_string());
    if !dashes.is_empty() {
        stroke += &parameter("stroke-dasharray", dashes);
    }
    format!("          <LineSymbolizer><Stroke>{stroke}</Stroke></LineSymbolizer>\n")
}

/// Boulders by one of their figures, and what has none.
fn graduated_points(property: &str, classes: &[Class], without: &str) -> String {
    let mut rules = String::new();
    for (i, class) in classes.iter().enumerate() {
        let symbol = point(class.mark, class.colour, class.size_px);
        let _ = write!(rules, "{}", rule(class.label, &within(property, class, i + 1 == classes.len()), &symbol));
    }
    let assessed = and(&[compared("PropertyIsEqualTo", "status", "assessed"), null(property)]);
    rules += &rule(without, &assessed, &point(Mark::Circle, "#ffffff", 8));
    let not = compared("PropertyIsEqualTo", "status", "not_assessed");
    rules + &rule("not assessed: unknown, never open", &not, &point(NOT_ASSESSED_MARK, NOT_ASSESSED_COLOUR, 11))
}

/// The style of the boulder layer.
pub fn boulders() -> String {
    let source = graduated_points("p_source", &SOURCE_CLASSES, "assessed, source likelihood not computed");
    let thickness = graduated_points("spall_thickness_mm", &THICKNESS_CLASSES, "assessed, no draw spalled");
    document(
        "boulders",
        &[
            style("source-likelihood", "Likelihood that the boulder or a part of it moves", true, &source),
            style("spall-thickness", "Expected spall thickness, given that it spalls", false, &thickness),
        ],
    )
}

/// The style of the trail layer.
pub fn trails() -> String {
    let mut proposals = String::new();
    for look in PROPOSAL_LOOKS {
        let word = look.proposal.word();
        let symbol = line(look.colour, look.width_px, look.dashes);
        proposals += &rule(&format!("proposed: {word}"), &compared("PropertyIsEqualTo", "proposal", word), &symbol);
    }
    let mut reach = String::new();
    for (i, class) in REACH_CLASSES.iter().enumerate() {
        let filter = within("p_any", class, i + 1 == REACH_CLASSES.len());
        reach += &rule(class.label, &filter, &line(class.colour, class.size_px, ""));
    }
    reach += &rule("not computed: unknown, never open", &null("p_any"), &line(NOT_ASSESSED_COLOUR, 4, "2 6"));
    document(
        "trails",
        &[
            style("proposal", "What is proposed to the land manager", true, &proposals),
            style("likelihood", "Likelihood that a block reaches the stretch", false, &reach),
        ],
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use resvg::usvg::roxmltree::{Document, Node};

    fn rules(text: &str) -> Vec<usize> {
        let document = Document::parse(text).expect("well-formed XML");
        let named = |node: &Node<'_, '_>, name: &str| node.has_tag_name(("http://www.opengis.net/sld", name));
        let styles: Vec<_> = document.descendants().filter(|n| named(n, "UserStyle")).collect();
        let defaults =
            styles.iter().filter(|s| s.descendants().any(|n| named(&n, "IsDefault") && n.text() == Some("1")));
        assert_eq!(defaults.count(), 1, "one style is the default");
        styles.iter().map(|s| s.descendants().filter(|n| named(n, "Rule")).count()).collect()
    }

    #[test]
    fn styles_are_well_formed_with_a_rule_for_every_class() {
        // A class each, then assessed without a figure, then not assessed.
        let graduated = |classes: &[Class]| classes.len() + 2;
        assert_eq!(rules(&boulders()), [graduated(&SOURCE_CLASSES), graduated(&THICKNESS_CLASSES)]);
        assert_eq!(rules(&trails()), [PROPOSAL_LOOKS.len(), REACH_CLASSES.len() + 1]);
    }

    #[test]
    fn every_property_of_a_filter_is_a_field_of_its_layer() {
        let names = |text: &str| -> Vec<String> {
            let document = Document::parse(text).expect("well-formed XML");
            let wanted = |n: &Node<'_, '_>| n.has_tag_name(("http://www.opengis.net/ogc", "PropertyName"));
            document.descendants().filter(wanted).map(|n| n.text().expect("a name").to_owned()).collect()
        };
        let boulder_names = names(&boulders());
        assert!(boulder_names.len() > 10);
        for name in boulder_names {
            assert!(crate::output::BOULDER_FIELDS.iter().any(|f| f.name == name), "{name}");
        }
        for name in names(&trails()) {
            assert!(crate::output::TRAIL_FIELDS.iter().any(|f| f.name == name), "{name}");
        }
    }
}
