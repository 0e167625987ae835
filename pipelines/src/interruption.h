#pragma once

namespace wavefount {

/// From now on Ctrl-C (and a polite kill) asks the work to stop after the frames in hand; a second
/// one ends the program at once. Nothing is lost either way: results appear only when complete.
void listen_for_interruption();
bool interrupted();

/// Thrown where interrupted work is given up.
struct Interrupted {};

}  // namespace wavefount
