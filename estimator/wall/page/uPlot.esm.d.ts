// SPDX-License-Identifier: MIT
// Types of the plotting library, which is served beside the page under this name.
import uPlot from "uplot";
export default uPlot;
