// SPDX-License-Identifier: MIT
#include "estimator/wall/report.hpp"

#include <stdexcept>
#include <string_view>

namespace holdfast::wall {
namespace {

constexpr std::string_view kData = R"(<script type="application/json" id="outing"></script>)";
constexpr std::string_view kModule = R"(<script type="module" src="report.js"></script>)";
constexpr std::string_view kSheetBegin = R"(<link rel="stylesheet" href=")";
constexpr std::string_view kSheetEnd = R"(">)";

constexpr std::string_view kLoader = "report_loader.js";

const PageFile& file(std::span<const PageFile> files, std::string_view name) {
    const PageFile* found = find(files, name);
    if (found == nullptr) throw std::runtime_error("report: the page has no file " + std::string(name));
    return *found;
}

void replace(std::string& html, std::string_view place, const std::string& text) {
    const std::size_t at = html.find(place);
    if (at == std::string::npos)
        throw std::runtime_error("report: the template has no " + std::string(place));
    html.replace(at, place.size(), text);
}

void put_sheets_inside(std::string& html, std::span<const PageFile> files) {
    for (std::size_t at = 0; (at = html.find(kSheetBegin, at)) != std::string::npos;) {
        const std::size_t name = at + kSheetBegin.size();
        const std::size_t end = html.find(kSheetEnd, name);
        if (end == std::string::npos)
            throw std::runtime_error("report: the template's style sheet has no end");
        const std::string_view sheet = file(files, html.substr(name, end - name)).content;
        const std::string style = "<style>\n" + std::string(sheet) + "</style>";
        html.replace(at, end + kSheetEnd.size() - at, style);
        at += style.size();
    }
}

std::string modules_json(std::span<const PageFile> files) {
    std::string text = "[";
    for (const PageFile& module : files) {
        if (!module.name.ends_with(".js") || module.name == kLoader) continue;
        if (text.size() > 1) text += ',';
        text += "[" + quoted(module.name) + "," + quoted(module.content) + "]";
    }
    return text + "]";
}

std::string data_element(std::string_view id, std::string_view json) {
    return R"(<script type="application/json" id=")" + std::string(id) + "\">" + inside_html(json) +
           "</script>";
}

std::string outing_json(std::span<const Text> messages) {
    std::string text = R"({"messages":[)";
    for (std::size_t i = 0; i < messages.size(); ++i) {
        if (i > 0) text += ",\n";
        text += *messages[i];
    }
    return text + "]}";
}

}  // namespace

std::string report_html(std::span<const Text> messages, std::span<const PageFile> files) {
    std::string html(file(files, "report.html").content);
    put_sheets_inside(html, files);
    replace(html, kModule,
            data_element("modules", modules_json(files)) + "\n<script type=\"module\">\n" +
                std::string(file(files, kLoader).content) + "</script>");
    replace(html, kData, data_element("outing", outing_json(messages)));
    return html;
}

}  // namespace holdfast::wall
