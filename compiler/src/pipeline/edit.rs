//! Edits of a model file, as a person would make them: lines of a state's table written or left out.

/// A model file with keys of a state's table written anew or left out. None where the state has no table with a
/// header of its own.
pub(super) fn edited(
    text: &str,
    state: &str,
    write: &[(&'static str, String)],
    leave_out: &[&'static str],
) -> Option<String> {
    let headers = [format!("[states.{state}]"), format!("[states.\"{state}\"]")];
    let is_header = |line: &str| headers.iter().any(|h| line.trim_start().starts_with(h));
    let key = |line: &str| line.split('=').next().unwrap_or("").trim().to_owned();
    let dropped = |line: &str| {
        let key = key(line);
        leave_out.contains(&key.as_str()) || write.iter().any(|(k, _)| *k == key)
    };
    let mut lines = Vec::new();
    let (mut inside, mut seen) = (false, false);
    for line in text.lines() {
        if line.trim_start().starts_with('[') {
            inside = is_header(line);
        }
        if inside && dropped(line) {
            continue;
        }
        lines.push(line.to_owned());
        if inside && is_header(line) {
            seen = true;
            lines.extend(write.iter().map(|(k, v)| format!("{k} = \"{v}\"")));
        }
    }
    seen.then(|| lines.join("\n") + "\n")
}
