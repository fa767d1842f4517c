//! Every pass in order, with what holds after each.
