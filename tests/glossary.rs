//! Holds the glossary of `docs/architecture.md` to the words that the code reads and writes.

use spallcast::fire::exposure::ExposureClass;
use spallcast::flag::Flag;
use spallcast::site::{Contact, GroundAfter, Kind, Moisture, Support, Weathering};

const PAGE: &str = include_str!("../docs/architecture.md");

fn lacking<'w>(page: &str, words: impl IntoIterator<Item = &'w str>) -> Vec<&'w str> {
    words.into_iter().filter(|w| !page.contains(&format!("`{w}`"))).collect()
}

#[test]
fn every_word_of_a_record_is_in_the_glossary() {
    let words: Vec<&str> = ExposureClass::ALL
        .iter()
        .map(|w| w.word())
        .chain(Contact::ALL.iter().map(|w| w.word()))
        .chain(GroundAfter::ALL.iter().map(|w| w.word()))
        .chain(Kind::ALL.iter().map(|w| w.word()))
        .chain(Moisture::ALL.iter().map(|w| w.word()))
        .chain(Support::ALL.iter().map(|w| w.word()))
        .chain(Weathering::ALL.iter().map(|w| w.word()))
        .collect();
    assert_eq!(words.len(), 8 + 5 + 3 + 2 + 3 + 5 + 4, "a word was added or removed; the glossary must follow");
    assert_eq!(
        lacking("`grass`", words.iter().copied()).len(),
        words.len() - 1,
        "the check itself finds what is missing"
    );
    assert_eq!(lacking(PAGE, words), Vec::<&str>::new(), "missing from docs/architecture.md");
}

#[test]
fn every_flag_is_in_the_glossary_with_its_meaning() {
    assert!(!Flag::ALL.is_empty());
    for flag in Flag::ALL {
        let row = format!("| `{}` | {} |", flag.code(), flag.meaning());
        assert!(PAGE.contains(&row), "docs/architecture.md lacks or misstates the row {row}");
    }
}
