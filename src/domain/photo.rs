//! Three clicks on a photo.
