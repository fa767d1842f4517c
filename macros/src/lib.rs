//! `model!("models/x.toml")`: a driftwright model compiled where it is named.

use std::path::{Path, PathBuf};

use proc_macro::TokenStream;
use quote::quote;
use syn::LitStr;

/// Compiles a model file into a module named like the model.
///
/// The path counts from the package's root; a file that is not there is looked for beside the source
/// file that names it. The file is tracked: a change to it compiles the crate again. What is wrong with
/// a model stops the compiler with an excerpt of the file.
///
/// The crate needs `driftwright-runtime` among its dependencies.
///
/// ```ignore
/// driftwright_macros::model!("models/orchard_spot.toml");
///
/// let simulator = orchard_spot::OrchardSpot::new(orchard_spot::Parameters::default())?;
/// ```
#[proc_macro]
pub fn model(input: TokenStream) -> TokenStream {
    let Ok(path) = syn::parse::<LitStr>(input) else {
        let text = "model! takes the path of a model file as a string: model!(\"models/x.toml\")";
        return quote! { ::core::compile_error!(#text); }.into();
    };
    expand(&path.value()).into()
}

/// Where a model file was found.
struct Found {
    path: PathBuf,
    /// An expression for the path that holds on every machine.
    tracked: proc_macro2::TokenStream,
}

fn expand(shown: &str) -> proc_macro2::TokenStream {
    let found = find(shown);
    let Found { path, tracked } = &found;
    match driftwright::build::model(path, shown) {
        Ok(built) => {
            let module = driftwright::back::rust::generate(&built.program);
            quote! {
                const _: &[u8] = ::core::include_bytes!(#tracked);
                #module
            }
        }
        Err(report) => {
            let text = format!("the model does not compile\n\n{}", report.trim_end());
            // A file that is not there cannot be tracked.
            let track = path
                .is_file()
                .then(|| quote! { const _: &[u8] = ::core::include_bytes!(#tracked); });
            quote! { #track ::core::compile_error!(#text); }
        }
    }
}

/// The file under the package's root, or else beside the source file.
fn find(shown: &str) -> Found {
    let root = std::env::var_os("CARGO_MANIFEST_DIR")
        .map(PathBuf::from)
        .unwrap_or_default();
    let under_root = root.join(shown);
    let beside = proc_macro::Span::call_site()
        .local_file()
        .and_then(|file| file.parent().map(|directory| directory.join(shown)));
    match beside {
        Some(path) if !under_root.is_file() && path.is_file() => Found {
            path,
            tracked: quote! { #shown },
        },
        _ => Found {
            path: under_root,
            tracked: tracked_under_root(shown),
        },
    }
}

fn tracked_under_root(shown: &str) -> proc_macro2::TokenStream {
    if Path::new(shown).is_absolute() {
        return quote! { #shown };
    }
    quote! { ::core::concat!(::core::env!("CARGO_MANIFEST_DIR"), "/", #shown) }
}
