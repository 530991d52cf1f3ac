//! The project itself: its arrows, its licences, its documents and its catalogues.

mod arrows;
mod catalogues;
mod documents;
mod licences;
