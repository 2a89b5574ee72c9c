// SPDX-License-Identifier: MIT
#include <algorithm>
#include <catch2/catch.hpp>

#include "tests/structure/include_rule.hpp"

using holdfast::structure::breaches;
using holdfast::structure::Tree;

TEST_CASE("every file includes only what its folder may use") {
    const Tree tree = holdfast::structure::read_tree(HOLDFAST_SOURCE_DIR);
    REQUIRE(tree.contains("estimator/core/engine.hpp"));
    REQUIRE(tree.contains("proto/vocabulary/frame.hpp"));
    for (const std::string& breach : breaches(tree)) FAIL_CHECK(breach);
}

TEST_CASE("every source file begins with its licence line") {
    for (const auto& [path, text] : holdfast::structure::read_tree(HOLDFAST_SOURCE_DIR)) {
        INFO(path);
        CHECK(text.starts_with("// SPDX-License-Identifier: MIT\n"));
    }
}

TEST_CASE("the checker sees each kind of breach") {
    const Tree sound{{"estimator/core/engine.hpp", "#include <array>\n"},
                     {"proto/vocabulary/frame.hpp", "\n"},
                     {"firmware_host/car/chassis.cpp", "#include \"proto/vocabulary/frame.hpp\"\n"}};
    REQUIRE(breaches(sound).empty());

    struct Case {
        const char* file;
        const char* line;
    };
    const auto broken =
        GENERATE(Case{"firmware_host/car/tyre.cpp",
                      "#include \"estimator/core/engine.hpp\""},               // the simulator and the model
                 Case{"estimator/core/model.cpp", "#include <vector>"},        // heap in the core
                 Case{"estimator/core/model.cpp", "  #  include <iostream>"},  // I/O, oddly written
                 Case{"estimator/core/model.cpp", "#include \"firmware_host/car/chassis.cpp\""},
                 Case{"estimator/session/log.cpp",
                      "#include \"estimator/core/engine.hpp\""},           // only car.hpp is for it
                 Case{"estimator/link/in.hpp", "#include <zmq.hpp>"},      // heavy header in a header
                 Case{"estimator/outputs/out.cpp", "#include <zmq.hpp>"},  // wrong folder
                 Case{"estimator/outputs/out.cpp", "#include \"proto/wire.pb.h\""},  // generated
                 Case{"proto/codec.hpp", "#include \"proto/wire.pb.h\""},
                 Case{"estimator/outputs/out.cpp", "#include \"run.hpp\""},  // not from the root
                 Case{"estimator/elsewhere/x.cpp", ""});                     // folder without a rule
    Tree tree = sound;
    tree[broken.file] = std::string("// first line\n") + broken.line + "\n";
    INFO(broken.file << " with " << broken.line);
    const auto found = breaches(tree);
    REQUIRE(found.size() == 1);
    CHECK(found.front().starts_with(broken.file));
}
