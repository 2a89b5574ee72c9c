// SPDX-License-Identifier: MIT
#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>

#include "estimator/wall/report.hpp"
#include "tests/wall/examples.hpp"

using namespace holdfast;
using nlohmann::json;

namespace {

const wall::PageFile kTemplate{"report.html", "text/html", R"(<!doctype html>
<link rel="stylesheet" href="style.css">
<p>body</p>
<script type="application/json" id="outing"></script>
<script type="module" src="report.js"></script>
)"};
const wall::PageFile kStyle{"style.css", "text/css", "body {color: black}"};
const wall::PageFile kModule{"report.js", "text/javascript", "const end = \"</script>\";"};
const wall::PageFile kOther{"other.js", "text/javascript", "export {};"};
const wall::PageFile kLoader{"report_loader.js", "text/javascript", "/* loads */"};

std::vector<wall::PageFile> files() {
    return {kTemplate, kStyle, kModule, kOther, kLoader};
}

wall::Text hello_of(const std::string& car) {
    return std::make_shared<const std::string>(wall::hello_json(*examples::hello(1, car)));
}

std::size_t count(const std::string& text, const std::string& part) {
    std::size_t n = 0;
    for (std::size_t at = 0; (at = text.find(part, at)) != std::string::npos; at += part.size()) ++n;
    return n;
}

// What a browser takes for the content of the element that begins so.
json element(const std::string& html, const std::string& id) {
    const std::string begin = R"(<script type="application/json" id=")" + id + "\">";
    const std::size_t from = html.find(begin) + begin.size();
    return json::parse(html.substr(from, html.find("</script", from) - from));
}

}  // namespace

TEST_CASE("style, modules and data lie in the one file") {
    const wall::Text messages[] = {hello_of("Plover 11"), hello_of("Plover 12")};
    const std::string html = wall::report_html(messages, files());
    CHECK(html.find("<style>\nbody {color: black}</style>") != std::string::npos);
    CHECK(html.find("href=") == std::string::npos);
    CHECK(html.find("src=") == std::string::npos);
    CHECK(html.find("/* loads */") != std::string::npos);
    CHECK(element(html, "outing").at("messages").at(1).at("car") == "Plover 12");
    CHECK(element(html, "modules") == json::array({json::array({"report.js", kModule.content}),
                                                   json::array({"other.js", kOther.content})}));
}

TEST_CASE("nothing in a name can end the element that holds it") {
    for (const std::string& name :
         {std::string("</script><script>alert(1)</script>"), std::string("<!--<script>"),
          std::string("]]></SCRIPT >"), std::string("a\"b\\c\n\xE2\x80\xA8&lt;")}) {
        const wall::Text messages[] = {hello_of(name)};
        const std::string html = wall::report_html(messages, files());
        // The template's own three elements and no more: data, modules, loader.
        CHECK(count(html, "<script") == 3);
        CHECK(count(html, "</script>") == 3);
        CHECK(html.find("<!--") == std::string::npos);
        CHECK(element(html, "outing").at("messages").at(0).at("car") == name);
    }
}

TEST_CASE("a template without its places is refused by the name of what it lacks") {
    const std::span<const wall::Text> nothing;
    using Catch::Matchers::Contains;
    CHECK_THROWS_WITH(wall::report_html(nothing, std::vector{kStyle}), Contains("report.html"));
    const wall::PageFile bare{"report.html", "text/html", "<p></p>"};
    CHECK_THROWS_WITH(wall::report_html(nothing, std::vector{bare, kModule, kLoader}), Contains("report.js"));
    CHECK_THROWS_WITH(wall::report_html(nothing, std::vector{kTemplate, kModule, kLoader}),
                      Contains("style.css"));
}

TEST_CASE("the program's own template takes everything in") {
    const wall::Text messages[] = {hello_of("Plover 11")};
    const std::string html = wall::report_html(messages);
    CHECK(html.find("<link rel=\"stylesheet\"") == std::string::npos);
    CHECK(element(html, "outing").at("messages").at(0).at("kind") == "hello");
    bool has_module = false;
    for (const json& module : element(html, "modules"))
        has_module = has_module || module.at(0) == "report.js";
    CHECK(has_module);
}
