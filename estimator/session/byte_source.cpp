// SPDX-License-Identifier: MIT
#include "estimator/session/byte_source.hpp"

#include <zlib.h>
#include <zstd.h>

#include <algorithm>
#include <cstring>
#include <utility>

namespace holdfast::session {
namespace {

class PlainSource final : public ByteSource {
  public:
    using ByteSource::ByteSource;

    std::size_t read(std::span<char> into) override {
        std::size_t done = 0;
        while (done < into.size()) {
            if (file_.unread().empty() && !file_.refill()) {
                failure_ = file_.failure();
                break;
            }
            const auto bytes = file_.unread().first(std::min(file_.unread().size(), into.size() - done));
            std::memcpy(into.data() + done, bytes.data(), bytes.size());
            file_.consume(bytes.size());
            done += bytes.size();
        }
        return done;
    }
};

// RFC 1952: one member or several, zeros allowed behind the last.
class GzipSource final : public ByteSource {
  public:
    explicit GzipSource(RawFile file) : ByteSource(std::move(file)) {
        constexpr int kGzipWindow = 15 + 16;
        if (inflateInit2(&stream_, kGzipWindow) != Z_OK) failure_ = "out of memory for gzip";
    }
    ~GzipSource() override { inflateEnd(&stream_); }

    std::size_t read(std::span<char> into) override {
        stream_.next_out = reinterpret_cast<Bytef*>(into.data());
        stream_.avail_out = static_cast<uInt>(into.size());
        while (stream_.avail_out > 0 && !failure_) {
            if (file_.unread().empty() && !file_.refill()) {
                failure_ = file_.failure();
                if (!failure_ && !between_members_) {
                    failure_ = "the gzip data stop before their end mark: the file is cut";
                }
                break;
            }
            if (between_members_ && !start_next_member()) continue;
            inflate_some();
        }
        return into.size() - stream_.avail_out;
    }

  private:
    bool start_next_member() {
        constexpr char kFirstMagicByte = '\x1f';
        if (file_.unread().front() == kFirstMagicByte) {
            inflateReset(&stream_);
            between_members_ = false;
            return true;
        }
        if (file_.unread().front() == '\0') {
            file_.consume(1);
        } else {
            failure_ = "bytes that are not gzip follow the end of the gzip data";
        }
        return false;
    }

    void inflate_some() {
        const auto input = file_.unread();
        stream_.next_in =
            reinterpret_cast<Bytef*>(const_cast<char*>(input.data()));  // zlib does not write there
        stream_.avail_in = static_cast<uInt>(input.size());
        const int result = inflate(&stream_, Z_NO_FLUSH);
        file_.consume(input.size() - stream_.avail_in);
        if (result == Z_STREAM_END) {
            between_members_ = true;
        } else if (result != Z_OK) {
            failure_ =
                std::string("the gzip data are damaged: ") + (stream_.msg ? stream_.msg : "no more is known");
        }
    }

    z_stream stream_{};
    bool between_members_ = false;
};

// RFC 8878: one frame or several.
class ZstdSource final : public ByteSource {
  public:
    explicit ZstdSource(RawFile file)
        : ByteSource(std::move(file)), stream_(ZSTD_createDStream(), &ZSTD_freeDStream) {}

    std::size_t read(std::span<char> into) override {
        ZSTD_outBuffer output{into.data(), into.size(), 0};
        while (output.pos < output.size && !failure_) {
            // Output may still wait inside the stream when the input is used up: only a call that gave
            // nothing on empty input has reached the end.
            if (file_.unread().empty()) file_.refill();
            const bool at_end = file_.unread().empty();
            if (at_end && inside_frame_ == 0) {
                failure_ = file_.failure();
                break;
            }
            const std::size_t before = output.pos;
            ZSTD_inBuffer input{file_.unread().data(), file_.unread().size(), 0};
            inside_frame_ = ZSTD_decompressStream(stream_.get(), &output, &input);
            file_.consume(input.pos);
            if (ZSTD_isError(inside_frame_) != 0) {
                failure_ = std::string("the zstd data are damaged: ") + ZSTD_getErrorName(inside_frame_);
            } else if (at_end && inside_frame_ != 0 && output.pos == before) {
                failure_ = file_.failure().value_or("the zstd data stop before their end: the file is cut");
            }
        }
        return output.pos;
    }

  private:
    std::unique_ptr<ZSTD_DStream, std::size_t (*)(ZSTD_DStream*)> stream_;
    std::size_t inside_frame_ = 1;  // ZSTD_decompressStream's hint: 0 once a frame is whole
};

bool begins_with(std::span<const char> bytes, std::string_view magic) {
    return bytes.size() >= magic.size() && std::equal(magic.begin(), magic.end(), bytes.begin());
}

}  // namespace

std::unique_ptr<ByteSource> unpack(RawFile file) {
    if (begins_with(file.unread(), "\x1f\x8b")) return std::make_unique<GzipSource>(std::move(file));
    if (begins_with(file.unread(), "\x28\xb5\x2f\xfd")) return std::make_unique<ZstdSource>(std::move(file));
    return std::make_unique<PlainSource>(std::move(file));
}

}  // namespace holdfast::session
