//! Diagnostics for services that show findings beside the code: the Static Analysis Results Interchange
//! Format (SARIF) version 2.1.0, OASIS standard, 27 March 2020.

use std::collections::BTreeMap;

use serde_json::{Value, json};

use super::{Code, Diagnostic};
use crate::source::{SourceFile, Span};

/// The `check --format sarif` document of several files, in the order given: one run, whose rules are
/// the table of codes.
///
/// Lines and columns count from 1, columns in Unicode code points, ends are one past the last character.
/// Paths become URI references as they were given, so that a relative path stays relative.
pub fn sarif<'a>(files: impl IntoIterator<Item = (&'a SourceFile, &'a [Diagnostic])>) -> Value {
    let (mut artifacts, mut results) = (Vec::new(), Vec::new());
    let mut known = BTreeMap::new();
    for (source, diagnostics) in files {
        // A file that was named twice is one artifact.
        let index = *known.entry(source.path()).or_insert_with(|| {
            let location = json!({ "uri": uri(source.path()) });
            artifacts.push(json!({ "location": location, "sourceLanguage": "toml" }));
            artifacts.len() - 1
        });
        let file = File { source, index };
        results.extend(diagnostics.iter().map(|d| file.result(d)));
    }
    json!({
        "$schema": "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json",
        "version": "2.1.0",
        "runs": [{
            "tool": { "driver": {
                "name": "driftwright",
                "version": env!("CARGO_PKG_VERSION"),
                "semanticVersion": env!("CARGO_PKG_VERSION"),
                "rules": Code::ALL.iter().map(|code| rule(*code)).collect::<Vec<_>>(),
            } },
            "columnKind": "unicodeCodePoints",
            "artifacts": artifacts,
            "results": results,
        }],
    })
}

fn rule(code: Code) -> Value {
    json!({
        "id": code.id(),
        "name": format!("{code:?}"),
        "shortDescription": { "text": code.title() },
        "fullDescription": { "text": code.explanation() },
        "help": { "text": code.explanation() },
    })
}

/// A file and its place among the artifacts.
struct File<'a> {
    source: &'a SourceFile,
    index: usize,
}

impl File<'_> {
    fn result(&self, diagnostic: &Diagnostic) -> Value {
        let mut text = diagnostic.message.clone();
        let rest = diagnostic.notes.iter().chain(&diagnostic.hint);
        rest.for_each(|more| {
            text.push('\n');
            text.push_str(more);
        });
        let mut result = json!({
            "ruleId": diagnostic.code.id(),
            "ruleIndex": Code::ALL.iter().position(|code| *code == diagnostic.code),
            "level": diagnostic.severity.name(),
            "message": { "text": text },
            "locations": [{ "physicalLocation": self.place(diagnostic.span) }],
        });
        let others = diagnostic
            .labels
            .iter()
            .filter(|l| l.span != diagnostic.span);
        let related: Vec<Value> = others
            .enumerate()
            .map(|(id, label)| {
                json!({
                    "id": id,
                    "message": { "text": label.text },
                    "physicalLocation": self.place(label.span),
                })
            })
            .collect();
        if !related.is_empty() {
            result["relatedLocations"] = Value::Array(related);
        }
        result
    }

    /// The place of characters; the whole file where it could not be read.
    fn place(&self, span: Span) -> Value {
        let file = json!({ "uri": uri(self.source.path()), "index": self.index });
        if self.source.text().is_empty() {
            return json!({ "artifactLocation": file });
        }
        let (start, end) = (
            self.source.position(span.start),
            self.source.position(span.end),
        );
        json!({
            "artifactLocation": file,
            "region": {
                "startLine": start.line,
                "startColumn": start.column,
                "endLine": end.line,
                "endColumn": end.column,
            },
        })
    }
}

/// A path as a URI reference (RFC 3986): relative ones stay so, absolute ones get the scheme `file`.
fn uri(path: &str) -> String {
    let path = if cfg!(windows) {
        path.replace('\\', "/")
    } else {
        path.to_owned()
    };
    let mut uri = String::from(match path.as_bytes() {
        [b'/', ..] => "file://",
        [drive, b':', b'/', ..] if cfg!(windows) && drive.is_ascii_alphabetic() => "file:///",
        _ => "",
    });
    for byte in path.bytes() {
        match byte {
            b'/' | b'-' | b'.' | b'_' | b'~' => uri.push(char::from(byte)),
            _ if byte.is_ascii_alphanumeric() => uri.push(char::from(byte)),
            _ => uri.push_str(&format!("%{byte:02X}")),
        }
    }
    uri
}

#[cfg(test)]
mod tests {
    use super::uri;

    #[test]
    fn paths_are_uri_references() {
        for (path, expected) in [
            ("models/a.toml", "models/a.toml"),
            ("../a b.toml", "../a%20b.toml"),
            ("c:x.toml", "c%3Ax.toml"),
            ("\u{e9}#?.toml", "%C3%A9%23%3F.toml"),
            ("/tmp/a.toml", "file:///tmp/a.toml"),
        ] {
            assert_eq!(uri(path), expected);
        }
    }
}
