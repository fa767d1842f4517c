//! Model files and byte spans in them.
