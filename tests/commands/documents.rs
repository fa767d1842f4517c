//! The dossier typeset: one HTML page without errors, LaTeX that compiles.

use std::collections::BTreeSet;
use std::process::Command;

use scraper::{Html, Selector};

use crate::harness::{self, Folder, run};

fn derived(model: &str, format: &str) -> String {
    let ran = run(&["derive", model, "--format", format]);
    assert_eq!(ran.status, 0, "{model}: {}", ran.err);
    ran.out
}

/// The shipped models.
fn models() -> impl Iterator<Item = String> {
    harness::models()
        .into_iter()
        .map(|name| format!("models/{name}"))
}

fn all<'a>(page: &'a Html, selector: &str) -> Vec<scraper::ElementRef<'a>> {
    let selector = Selector::parse(selector).expect("a selector");
    page.select(&selector).collect()
}

/// The parser is html5ever's, which notes every deviation from the HTML standard.
#[test]
fn every_page_is_valid_and_self_contained() {
    assert!(
        !Html::parse_document("<p id=1></b>").errors.is_empty(),
        "the parser notes deviations"
    );
    for model in models() {
        let text = derived(&model, "html");
        let page = Html::parse_document(&text);
        assert!(page.errors.is_empty(), "{model}: {:?}", page.errors);
        let ids: Vec<&str> = all(&page, "[id]")
            .iter()
            .filter_map(|e| e.value().id())
            .collect();
        let distinct: BTreeSet<&str> = ids.iter().copied().collect();
        assert_eq!(ids.len(), distinct.len(), "{model}: an id twice");
        for link in all(&page, "[href]") {
            let target = link.value().attr("href").expect("an address");
            let id = target.strip_prefix('#').unwrap_or_else(|| {
                panic!("{model}: {target} is not on the page");
            });
            assert!(distinct.contains(id), "{model}: {target} leads nowhere");
        }
        for outside in ["script", "[src]", "link", "iframe"] {
            assert!(all(&page, outside).is_empty(), "{model}: {outside}");
        }
    }
}

/// Common practice of accessible pages (WCAG 2.2: 1.1.1, 1.3.1, 2.4.2, 3.1.1).
#[test]
fn every_page_says_what_its_parts_are() {
    for model in models() {
        let page = Html::parse_document(&derived(&model, "html"));
        assert_eq!(all(&page, "html[lang]").len(), 1, "{model}");
        assert_eq!(all(&page, "h1").len(), 1, "{model}");
        assert!(!all(&page, "title").is_empty(), "{model}");
        for head in all(&page, "th") {
            assert!(
                head.value().attr("scope").is_some(),
                "{model}: a table's head"
            );
        }
        for drawing in all(&page, "svg") {
            let text = drawing.value().attr("aria-label").unwrap_or_default();
            assert!(!text.is_empty(), "{model}: a drawing without words");
        }
    }
}

/// The Ito correction of the logarithm of a geometric Brownian motion (Hull 2018, section 14.7; from
/// memory) stands apart, as a formula.
#[test]
fn the_correction_is_set_apart() {
    let page = Html::parse_document(&derived("models/orchard_spot.toml", "html"));
    let corrections = all(&page, ".correction .right");
    let first = corrections.first().expect("a correction");
    let math = first.inner_html();
    assert!(
        math.contains("<mo>−</mo><mfrac><msup><mi>σ</mi><mn>2</mn></msup><mn>2</mn></mfrac>"),
        "{math}"
    );
    let text = derived("models/orchard_spot.toml", "latex");
    assert!(text.contains(r"-\frac{{\sigma }^{2}}{2}"), "{text}");
}

/// A hostile title and description are text, not markup.
#[test]
fn words_of_the_author_stay_words() {
    let folder = Folder::new();
    let title = r#"<script>alert(1)</script> & \\input{x} 100 % $x_1$ #1 ~^"#;
    let model = folder.write(
        "sly.toml",
        &format!(
            "[model]\nname = \"sly\"\ntitle = '''{title}'''\ndrivers = [\"W\"]\n[states.X]\n\
             initial = \"1\"\ndrift = \"0\"\ndiffusion = \"1\"\nabout = '''<b onclick=\"x\">{title}'''\n"
        ),
    );
    let page = Html::parse_document(&derived(&model, "html"));
    assert!(page.errors.is_empty(), "{:?}", page.errors);
    assert!(all(&page, "script, b, [onclick]").is_empty());
    let head: String = all(&page, "h1")[0].text().collect();
    assert_eq!(head, title);
    let text = derived(&model, "latex");
    assert!(!text.contains(r"\input"), "{text}");
}

#[test]
#[ignore = "needs LaTeX (pdflatex); cargo test -p driftwright --all-features --test commands -- --ignored latex"]
fn latex_compiles() {
    let folder = Folder::new();
    for model in models() {
        folder.write("dossier.tex", &derived(&model, "latex"));
        let ran = Command::new("pdflatex")
            .args(["-interaction=nonstopmode", "-halt-on-error", "dossier.tex"])
            .current_dir(folder.path("."))
            .output()
            .expect("pdflatex runs");
        let log = String::from_utf8_lossy(&ran.stdout).into_owned();
        assert!(ran.status.success(), "{model}: {log}");
    }
}
