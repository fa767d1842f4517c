//! Facts beside the model: exact laws, commutativity, moments.
