// SPDX-License-Identifier: MIT
#include "estimator/session/byte_sink.hpp"

#include <zlib.h>
#include <zstd.h>

#include <cerrno>
#include <cstring>
#include <utility>
#include <vector>

namespace holdfast::session {
namespace {

constexpr std::size_t kBlockBytes = std::size_t{64} * 1024;

}  // namespace

ByteSink::ByteSink(std::string path, Handle file) : path_(std::move(path)), file_(std::move(file)) {}

Error ByteSink::failed(const std::string& why) const {
    return {.file = path_, .message = "cannot be written: " + why + "; expected room for a new file"};
}

std::optional<Error> ByteSink::put(std::span<const char> bytes) {
    if (std::fwrite(bytes.data(), 1, bytes.size(), file_.get()) == bytes.size()) return std::nullopt;
    return failed(std::strerror(errno));
}

std::optional<Error> ByteSink::close() {
    if (std::fclose(file_.release()) == 0) return std::nullopt;
    return failed(std::strerror(errno));
}

namespace {

class PlainSink final : public ByteSink {
  public:
    PlainSink(std::string path, Handle file) : ByteSink(std::move(path), std::move(file)) {}
    std::optional<Error> write(std::span<const char> bytes) override { return put(bytes); }
    std::optional<Error> finish() override { return close(); }
};

class GzipSink final : public ByteSink {
  public:
    GzipSink(std::string path, Handle file)
        : ByteSink(std::move(path), std::move(file)), block_(kBlockBytes) {
        constexpr int kGzipWindow = 15 + 16;
        constexpr int kMemoryLevel = 8;
        ready_ = deflateInit2(&stream_, Z_DEFAULT_COMPRESSION, Z_DEFLATED, kGzipWindow, kMemoryLevel,
                              Z_DEFAULT_STRATEGY) == Z_OK;
    }
    ~GzipSink() override { deflateEnd(&stream_); }

    std::optional<Error> write(std::span<const char> bytes) override { return pack(bytes, Z_NO_FLUSH); }

    std::optional<Error> finish() override {
        if (auto error = pack({}, Z_FINISH)) return error;
        return close();
    }

  private:
    std::optional<Error> pack(std::span<const char> bytes, int flush) {
        if (!ready_) return failed("out of memory for gzip");
        stream_.next_in =
            reinterpret_cast<Bytef*>(const_cast<char*>(bytes.data()));  // zlib does not write there
        stream_.avail_in = static_cast<uInt>(bytes.size());
        do {
            stream_.next_out = reinterpret_cast<Bytef*>(block_.data());
            stream_.avail_out = static_cast<uInt>(block_.size());
            deflate(&stream_, flush);
            if (auto error = put({block_.data(), block_.size() - stream_.avail_out})) return error;
        } while (stream_.avail_out == 0);  // a block that is not full: all input is taken
        return std::nullopt;
    }

    z_stream stream_{};
    bool ready_ = false;
    std::vector<char> block_;
};

class ZstdSink final : public ByteSink {
  public:
    ZstdSink(std::string path, Handle file)
        : ByteSink(std::move(path), std::move(file)),
          stream_(ZSTD_createCCtx(), &ZSTD_freeCCtx),
          block_(kBlockBytes) {
        ZSTD_CCtx_setParameter(stream_.get(), ZSTD_c_checksumFlag, 1);
    }

    std::optional<Error> write(std::span<const char> bytes) override { return pack(bytes, ZSTD_e_continue); }

    std::optional<Error> finish() override {
        if (auto error = pack({}, ZSTD_e_end)) return error;
        return close();
    }

  private:
    std::optional<Error> pack(std::span<const char> bytes, ZSTD_EndDirective directive) {
        ZSTD_inBuffer input{bytes.data(), bytes.size(), 0};
        std::size_t still_inside = 0;
        do {
            ZSTD_outBuffer output{block_.data(), block_.size(), 0};
            still_inside = ZSTD_compressStream2(stream_.get(), &output, &input, directive);
            if (ZSTD_isError(still_inside) != 0) return failed(ZSTD_getErrorName(still_inside));
            if (auto error = put({block_.data(), output.pos})) return error;
        } while (directive == ZSTD_e_end ? still_inside > 0 : input.pos < input.size);
        return std::nullopt;
    }

    std::unique_ptr<ZSTD_CCtx, std::size_t (*)(ZSTD_CCtx*)> stream_;
    std::vector<char> block_;
};

}  // namespace

Result<std::unique_ptr<ByteSink>> ByteSink::create(const std::string& path) {
    Handle file(std::fopen(path.c_str(), "wb"), &std::fclose);
    if (!file) {
        return Error{.file = path,
                     .message = std::string("cannot be created: ") + std::strerror(errno) +
                                "; expected a folder that can be written to"};
    }
    std::unique_ptr<ByteSink> sink;
    if (path.ends_with(".gz")) {
        sink = std::make_unique<GzipSink>(path, std::move(file));
    } else if (path.ends_with(".zst")) {
        sink = std::make_unique<ZstdSink>(path, std::move(file));
    } else {
        sink = std::make_unique<PlainSink>(path, std::move(file));
    }
    return sink;
}

}  // namespace holdfast::session
