//! The worst case against searches that know nothing of how the tool finds it.

mod dense;
mod inside;
mod network;
