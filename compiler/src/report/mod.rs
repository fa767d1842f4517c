//! What a reviewer reads: the dossier, written as text, Markdown or JSON.
