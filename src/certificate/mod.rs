//! Claims about single words and whole languages that can be checked by someone who does not trust the program.
//!
//! - [`locate`]: where the beams of a word lie, exactly.
//! - [`witness`]: a simple orbit with a given word.
//! - [`refutation`]: why a word is not in the language: at most four corner images that no line separates.
//! - [`format`](mod@format): the certificate file.
//! - [`make`]: writing certificates.
//! - [`verify`]: reading and checking them. It shares nothing with the rest but exact numbers: no unfolding, no walk,
//!   no triangulation of this library.

pub mod format;
pub mod locate;
pub mod make;
pub mod refutation;
pub mod verify;
pub mod witness;
