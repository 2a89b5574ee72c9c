// SPDX-License-Identifier: MIT
#include "estimator/session/byte_source.hpp"

#include <catch2/catch.hpp>

#include "estimator/session/byte_sink.hpp"
#include "tests/session/small_log.hpp"

namespace holdfast::session {
namespace {

using testing::TempFolder;
using testing::write_file;

template <std::size_t size>
std::string bytes(const unsigned char (&values)[size]) {
    return {values, values + size};
}

// kText as packed by the programs gzip 1.12 and zstd 1.5.4.
const std::string kText = "a[s],b[-]\n1,2\n";
const std::string kGzip = bytes({0x1f, 0x8b, 0x08, 0x00, 0x00, 0x00, 0x00, 0x00, 0x02, 0x03, 0x4b, 0x8c,
                                 0x2e, 0x8e, 0xd5, 0x49, 0x8a, 0xd6, 0x8d, 0xe5, 0x32, 0xd4, 0x31, 0xe2,
                                 0x02, 0x00, 0x7a, 0x3f, 0xc3, 0xc1, 0x0e, 0x00, 0x00, 0x00});
const std::string kZstd =
    bytes({0x28, 0xb5, 0x2f, 0xfd, 0x24, 0x0e, 0x71, 0x00, 0x00, 0x61, 0x5b, 0x73, 0x5d, 0x2c,
           0x62, 0x5b, 0x2d, 0x5d, 0x0a, 0x31, 0x2c, 0x32, 0x0a, 0x19, 0xce, 0x4c, 0xa2});

struct Unpacked {
    std::string text;
    std::optional<std::string> failure;
};

Unpacked unpack_bytes(const std::string& content) {
    const TempFolder folder;
    auto file = RawFile::open(write_file(folder, "bytes", content));  // the name tells nothing
    REQUIRE(file);
    const auto source = unpack(std::move(*file));
    std::string text(1U << 20U, '\0');
    text.resize(source->read(text));
    return {text, source->failure()};
}

void check_whole(const std::string& content, const std::string& expected) {
    const Unpacked unpacked = unpack_bytes(content);
    CHECK(unpacked.text == expected);
    CHECK_FALSE(unpacked.failure);
}

TEST_CASE("plain, gzip and zstd are told apart by content") {
    check_whole(kText, kText);
    check_whole(kGzip, kText);
    check_whole(kZstd, kText);
}

TEST_CASE("several packed pieces in a row are one text") {
    check_whole(kGzip + kGzip, kText + kText);
    check_whole(kZstd + kZstd, kText + kText);
    check_whole(kGzip + std::string(5, '\0'), kText);  // padding, as from tapes and disk blocks
}

TEST_CASE("damage to packed data is said") {
    const Unpacked trailing = unpack_bytes(kGzip + "x");
    CHECK(trailing.text == kText);
    CHECK_THAT(trailing.failure.value(), Catch::Contains("not gzip"));

    std::string wrong_checksum = kGzip;
    wrong_checksum[kGzip.size() - 8] ^= 1;
    CHECK_THAT(unpack_bytes(wrong_checksum).failure.value(), Catch::Contains("gzip data are damaged"));

    wrong_checksum = kZstd;
    wrong_checksum.back() ^= 1;
    CHECK_THAT(unpack_bytes(wrong_checksum).failure.value(), Catch::Contains("zstd data are damaged"));
}

TEST_CASE("what is packed by name comes back, in pieces of any size") {
    const TempFolder folder;
    std::string text;
    for (int i = 0; i < 200'000; ++i) text += std::to_string(i * 7919 % 1000);
    for (const char* name : {"log.csv", "log.csv.gz", "log.csv.zst"}) {
        INFO(name);
        const std::string path = folder / name;
        auto sink = ByteSink::create(path);
        REQUIRE(sink);
        for (std::size_t at = 0; at < text.size(); at += 77'777) {
            REQUIRE_FALSE((*sink)->write(std::string_view(text).substr(at, 77'777)));
        }
        REQUIRE_FALSE((*sink)->finish());

        auto file = RawFile::open(path);
        REQUIRE(file);
        const bool packed = std::filesystem::file_size(path) < text.size();
        CHECK(packed == (std::string(name) != "log.csv"));
        const auto source = unpack(std::move(*file));
        std::string back;
        std::string piece(1009, '\0');
        for (std::size_t got = piece.size(); got == piece.size();) {
            got = source->read(piece);
            back.append(piece, 0, got);
        }
        CHECK(back == text);
        CHECK_FALSE(source->failure());
        CHECK(source->progress() == 1.0);
    }
}

TEST_CASE("files that cannot be read or written are errors that name them") {
    const TempFolder folder;
    const std::string absent = folder / "absent.csv";
    const auto missing = RawFile::open(absent);
    REQUIRE_FALSE(missing);
    CHECK(missing.errors().at(0).file == absent);
    CHECK_THAT(missing.errors().at(0).message, Catch::Contains("cannot be opened"));
    CHECK_FALSE(RawFile::open(folder.path()));  // a folder is no file

    const auto sink = ByteSink::create(folder / "no/such/folder.csv");
    REQUIRE_FALSE(sink);
    CHECK_THAT(sink.errors().at(0).message, Catch::Contains("cannot be created"));
}

TEST_CASE("a full disk is an error, not a silent loss") {
    if (!std::filesystem::exists("/dev/full")) return;
    auto sink = ByteSink::create("/dev/full");
    REQUIRE(sink);
    const std::string text(100'000, 'x');
    auto error = (*sink)->write(text);
    if (!error) error = (*sink)->finish();
    REQUIRE(error);
    CHECK_THAT(error->message, Catch::Contains("cannot be written"));
}

}  // namespace
}  // namespace holdfast::session
