//! The label of a container: whose it is, and how it is written on the page of its own sample.

use super::slot::Container;

/// Whose label was scanned or typed: a container's, or the sample's own (`None` inside).
///
/// The whole label, or at least its last four characters; separators and case do not count.
pub fn labelled(text: &str, number: &str, containers: &[Container]) -> Option<Option<i64>> {
    let typed = plain(text);
    if typed.chars().count() < 4 {
        return None;
    }
    let found = containers.iter().find(|container| plain(&container.label).ends_with(&typed));
    match found {
        Some(container) => Some(Some(container.id)),
        None if containers.is_empty() && plain(number).ends_with(&typed) => Some(None),
        None => None,
    }
}

fn plain(label: &str) -> String {
    label.chars().filter(|c| c.is_alphanumeric()).flat_map(char::to_uppercase).collect()
}

/// `A07-3NGQ` of `ST-033-A07-3NGQ`: on the page of one sample the study is known, and a heading is narrow.
pub fn short_label(label: &str) -> &str {
    label.rmatch_indices('-').nth(1).map_or(label, |(at, _)| &label[at + 1..])
}

#[cfg(test)]
mod tests {
    use super::*;

    /// screen_U68: the whole label or its last four characters; nothing shorter, nothing else.
    #[test]
    fn a_label_is_of_this_sample_or_it_is_not() {
        let containers = [
            Container { id: 7, label: "ST-031-A1-007".to_string() },
            Container { id: 8, label: "ST-031-A1-008".to_string() },
        ];
        let table = [
            ("ST-031-A1-007", Some(Some(7))),
            ("st031a1008", Some(Some(8))),
            ("1-008", Some(Some(8))),
            ("008", None),
            ("ST-031-A1-009", None),
            ("", None),
            ("ST-031-P07", None),
        ];
        for (text, expected) in table {
            assert_eq!(labelled(text, "ST-031-P07", &containers), expected, "{text}");
        }
        assert_eq!(labelled("TW-104-0640-R1", "TW-104-0640-R1", &[]), Some(None));
        assert_eq!(labelled("0640", "TW-104-0640-R1", &[]), None);
    }

    #[test]
    fn a_label_is_short_within_its_study() {
        for (label, short) in [("ST-033-A07-3NGQ", "A07-3NGQ"), ("A07-3NGQ", "A07-3NGQ"), ("7", "7")] {
            assert_eq!(short_label(label), short);
        }
    }
}
