#pragma once

namespace sunbudget {

/// Signals ask the run to stop, closed standard streams stay out of use. Called first of all.
void prepare_process();

}  // namespace sunbudget
