//! Wrong versions that were looked at and need no test.

use std::collections::BTreeMap;

use crate::mutate::Site;

/// Below a reason in brackets the places it holds for: `file | line as it is written | change`. A change
/// `*` stands for all on that line.
const LIST: &str = include_str!("judged.txt");

/// The reasons by the number of the place.
pub(crate) fn reasons(all: &[Site]) -> BTreeMap<usize, &'static str> {
    let mut reason = "";
    let mut found = BTreeMap::new();
    for line in LIST.lines().filter(|line| !line.is_empty()) {
        if let Some(heading) = line.strip_prefix('[') {
            reason = heading.trim_end_matches(']');
            continue;
        }
        let mut cells = line.splitn(2, " | ");
        let file = cells.next().unwrap_or_default();
        let (text, change) = cells
            .next()
            .and_then(|rest| rest.rsplit_once(" | "))
            .unwrap_or_else(|| panic!("file | line | change: {line}"));
        let fits = |site: &Site| {
            let same = change == "*" || site.what == change;
            same && site.file.ends_with(file) && site.text == text
        };
        let before = found.len();
        found.extend(
            (0..all.len())
                .filter(|&i| fits(&all[i]))
                .map(|i| (i, reason)),
        );
        assert!(found.len() > before, "no such place: {line}");
    }
    found
}
